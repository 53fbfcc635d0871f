"""Frozen data, in SI, without behaviour: curves, pumps, the case, states and what was found."""
