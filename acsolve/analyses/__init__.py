"""Questions and their answers: transfer, impedance, cutoff, sweep, equations, check."""
