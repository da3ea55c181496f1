"""Small widgets, one thing each."""
