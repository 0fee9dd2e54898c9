"""Rowkeeper: from one board file to a proven, fitted replacement for the logic of a dynamic memory board."""

__all__ = ["__version__"]

__version__ = "0.1.0"
