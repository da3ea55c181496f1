"""Headless commands, one module each."""
