"""polynomial: from a thermodynamic table to the two-range NASA polynomial, and how good that polynomial is."""
