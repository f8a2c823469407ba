"""The circuit as data: values, kinds of part, the netlist and its graph. No algebra here."""
