"""Lines to cards to an expanded flat netlist. Knows no electricity."""
