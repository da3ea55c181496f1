"""What the books say: published tables as data, each figure with its provenance."""
