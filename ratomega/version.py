"""The version of the package, read from its installed metadata."""

from importlib.metadata import version

__all__ = ["VERSION"]

VERSION = version("ratomega")
