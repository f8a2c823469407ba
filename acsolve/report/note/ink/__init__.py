"""Pictures as strokes and labels, written as SVG and as PDF operators inside LaTeX."""
