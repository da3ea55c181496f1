"""The job on disk: one file, written whole, never in place."""
