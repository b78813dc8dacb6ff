"""The version, read by the build and stamped into every record."""

__version__ = "0.1.0"
