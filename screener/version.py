"""The version of the tool, written into every result."""

__version__ = "0.1.0"
