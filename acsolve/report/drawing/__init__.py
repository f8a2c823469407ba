"""Schematics from the netlist alone: plan, placement, wires, shapes, pictures."""
