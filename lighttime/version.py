"""The version of this library, said in this one place."""

__version__ = "0.1.0"
