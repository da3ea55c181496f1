"""What could be done: every way of adding, as an edit of a layout."""
