"""fairloom: a batch validator for the low-voltage DC wiring of a fleet of sister hulls."""

__version__ = "0.1.0"
