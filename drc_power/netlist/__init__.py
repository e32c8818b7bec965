"""netlist."""
