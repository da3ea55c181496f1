"""Resistors: a circuit's conductors as networks, solved by nodal analysis."""
