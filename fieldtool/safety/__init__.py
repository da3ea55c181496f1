"""What now: isolation state, tasks and the next safe step."""
