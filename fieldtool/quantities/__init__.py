"""What a person types and reads: the grammar of entries, units and formatting."""
