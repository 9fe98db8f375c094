"""The version of the binding: that of the library it was written for."""

__version__ = '0.1.0'
