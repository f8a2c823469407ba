"""Element values of elliptic low-pass ladders, ripple 0.1 dB, edge at 1 rad/s, ends of 1 ohm.

Written down from memory of table 3.3 in J.-S. Hong, M. J. Lancaster, Microstrip Filters for
RF/Microwave Applications (2001), which follows the tables of R. Saal and E. Ulbrich, to four
decimals. A row stands here only where the ladder computed from Jacobi's functions has the same
elements; rows that differed by more than rounding were left out (all of order 3 among them),
and orders 7 to 10 are not remembered. Even orders are of the kind with equal ends, one notch at infinity.
"""

from __future__ import annotations

#: (order, edge of the stop band) -> shunt, coil and capacitor in series, shunt, …
ELLIPTIC_TENTH_DB = {
    (4, 1.2000): (0.3714, 0.5664, 1.0929, 1.1194, 0.9244),
    (4, 1.3962): (0.5675, 0.8467, 0.5261, 1.2138, 0.9345),
    (4, 1.5000): (0.6282, 0.9401, 0.4073, 1.2471, 0.9352),
    (4, 1.7090): (0.7094, 1.0688, 0.2730, 1.2943, 0.9348),
    (4, 2.0000): (0.7755, 1.1765, 0.1796, 1.3347, 0.9338),
    (5, 1.0500): (0.7081, 0.7663, 0.7357, 1.1276, 0.2014, 4.3812, 0.0499),
    (5, 1.1000): (0.8130, 0.9242, 0.4934, 1.2245, 0.3719, 2.1350, 0.2913),
    (5, 1.2000): (0.9144, 1.0652, 0.3163, 1.3820, 0.6013, 1.0933, 0.5297),
    (5, 1.6129): (1.0481, 1.2416, 0.1244, 1.6843, 1.0031, 0.3540, 0.8692),
    (5, 2.0000): (1.0876, 1.2932, 0.0732, 1.7939, 1.1433, 0.2004, 0.9772),
    (6, 1.0500): (0.4418, 0.7165, 0.9091, 0.8314, 0.3627, 2.4468, 0.8046, 0.9986),
    (6, 1.1000): (0.5763, 0.8880, 0.6128, 0.9730, 0.5906, 1.3567, 0.9431, 1.0138),
}
