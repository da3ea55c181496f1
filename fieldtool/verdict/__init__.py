"""May we: one checker for every circuit as edited, and what it leaves."""
