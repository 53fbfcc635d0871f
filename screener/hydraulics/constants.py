"""Constants of nature and of reference conditions."""

GRAVITY = 9.80665
"""[m/s2] standard acceleration of free fall, ISO 80000-3:2006, item 3-9.2."""

REFERENCE_DENSITY = 1000.0
"""[kg/m3] at which shaft powers are kept."""
