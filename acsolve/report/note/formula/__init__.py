"""Formulas as trees, read from this program's own spelling, written as MathML and TeX."""
