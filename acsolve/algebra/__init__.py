"""Exact and numeric algebra: polynomials, determinants, roots, elimination. Knows no circuit."""
