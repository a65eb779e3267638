"""Constants in the program's units: lengths in nm, fields relative to the incident amplitude."""

import math

TWO_PI = 2.0 * math.pi

# Gaps and films in which bulk, local optical constants stop to hold (common practice, no source for the exact figures;
# the trend: Ciraci et al., Science 337, 1072 (2012), from memory).
SMALLEST_GAP_NM = 0.5
DOUBTFUL_GAP_NM = 1.0
DOUBTFUL_FILM_NM = 5.0
