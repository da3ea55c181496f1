"""Paper: the record of a visit in sections, as HTML, PDF and CSV."""
