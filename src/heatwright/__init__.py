"""heatwright: from quantum-chemistry outputs to NASA polynomial thermo entries with residuals that can be checked."""

__version__ = "0.1.0"
