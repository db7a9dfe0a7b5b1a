"""Netlist and part sheet to a circuit of positions and parts. Nothing here simulates."""
