"""What the engine is timed against: one module a subject, each case beside the library routine that does the same."""
