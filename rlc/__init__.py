"""Judge a series resistor-inductor-capacitor loop from one sheet of parts."""

__version__ = "0.1.0"
