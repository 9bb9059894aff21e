"""Pages of talk: what is sent to comments, and the log."""
