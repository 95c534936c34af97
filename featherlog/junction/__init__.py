"""The design of matched fields and what follows from it: settings, limits, rounding, mismatch."""
