"""What the readings say the circuit is."""
