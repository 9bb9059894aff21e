"""Pages of collaborations and their people."""
