"""Allowed errors of margins, responses and requirement edges, each with its reason. Loosening one is a change to be argued."""

#: Figures of the poles and exact ratios, relative: f64 rounding, and the last bits of roots that lie close together.
POLES = 1e-9
#: Rounding of f64 in the coefficients; the poles of a near pair move by it over their distance.
POLE_ROUNDING = 1e-15
STATIC = 1e-12
#: Crossings, margins, peak sensitivity and bandwidth, relative.
MARGIN = 1e-9
#: Rounding of ω in f64, and what a phase margin of a few degrees makes of it.
OMEGA_ROUNDING = 2e-14
#: A frequency or time of an extreme, relative: the extreme itself is flat there, so that half of the digits of f64 are left.
PLACE_OF_EXTREME = 1e-6
#: Times, peaks and values of an answer, relative to the figure or, for a deviation, to the largest value of the answer.
ANSWER = 1e-6
#: Drawn curves, relative to their range: far below a pixel.
CURVE = 1e-6
#: Modes of poles that nearly coincide cancel in a curve; relative to the sum of their sizes, the digits that are left of it.
CANCELLED = 1e-9

#: A computed edge: this far inside the limit is met, this far outside it is not. The contract is 1e-6.
COMPUTED_EDGE = 1e-5
#: A proven edge; f64 rounds its value.
PROVEN_EDGE = 1e-12
#: An edge's setting follows from its knob by one multiplication or division in f64.
SCALE = 1e-14
#: A figure so near to the limit, relative, that rounding decides; such a sample says nothing.
UNDECIDED = 1e-9
