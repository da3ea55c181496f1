"""The validation core: knows no screen, no terminal and no clock but the one it is handed."""

__version__ = "0.1.0"
