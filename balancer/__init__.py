"""Balance the legs of a 120/240 V panel: read a circuit inventory, arrange it, prove how good it is."""

__version__ = "0.1.0"

__all__ = ["__version__"]
