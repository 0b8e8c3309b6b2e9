"""The arctangent of a ratio within ±1 as firmware has it: r + r·c(r²), no library and no division."""

from __future__ import annotations

SERIES = (-0.33325395, 0.19861854, -0.13398794, 0.08216767, -0.03551981, 0.00737398)
"""c(r²) = Σ SERIES[n] r^(2n + 2): smallest largest error on [0, 1] by linear programming, rounded; 3.4e-7 rad (a test)."""
