"""The figures that requirements speak of, from a loop worked out anew, and whether they meet a limit.

The error of a static figure is that at the comparison, command minus what the sensor shows: lim D/(F·s^k).
"""

import math

from flint import arb

from polynomials import rational
from refining import middle
from responses import GivenUp

#: Kinds whose figure must be at least the limit.
AT_LEAST = {
    "damping-ratio",
    "decay-rate",
    "natural-frequency-minimum",
    "gain-margin-up",
    "gain-margin-down",
    "phase-margin",
    "delay-margin",
    "bandwidth",
}
#: Kinds judged on exact rationals or proven balls.
PROVEN = {"damping-ratio", "decay-rate", "natural-frequency-minimum", "natural-frequency-maximum"}
PERCENT = {"overshoot", "undershoot"}
#: % of the final value; a smaller deviation is lost in the rounding of f64.
SMALLEST_DEVIATION = 1e-5
STATIC = {"step-error", "ramp-error", "parabola-error", "load-final"}


def figure(loop, kind):
    """The figure at a stable loop: a number, infinity, or None where it is undefined."""
    found = FIGURES[kind](loop)
    return found if found is None else float(found)


def meets(loop, kind, limit, near=0.0):
    """True or false, or None where the figure is nearer to the limit than `near`, relative, or too small a deviation to tell."""
    if not loop.stable:
        return False
    try:
        found = FIGURES[kind](loop)
        if kind == "peak-time" and too_flat(loop):
            return None
    except GivenUp:
        return None
    if found is None:
        return False
    if found == math.inf:
        return kind in AT_LEAST
    bound = arb(rational(limit))
    room = found - bound if kind in AT_LEAST else bound - found
    if kind in PERCENT and abs(room) <= SMALLEST_DEVIATION:
        # Without any deviation the limit 0 is met.
        return True if found <= SMALLEST_DEVIATION * 1e-6 else None
    if abs(room) <= arb(near) * abs(bound):
        return None
    return bool(room > 0)


def too_flat(loop):
    """Whether the answer passes its end by so little that nobody can say when."""
    found = FIGURES["overshoot"](loop)
    return found is not None and found <= SMALLEST_DEVIATION and FIGURES["peak-time"](loop) != 0


def over_poles(size):
    return lambda loop: min(middle(size(pole)) for pole in loop.poles)


def decibel(name):
    def of(loop):
        factor = getattr(loop.frequency, name)
        return factor if factor == math.inf else 20 * math.log10(factor)

    return of


def of_output(f):
    """A figure of the answer to a step; None without a final value."""

    def of(loop):
        answer = loop.answer("output")
        return f(answer) if answer and answer.end_exact != 0 else None

    return of


def beyond(answer):
    sign = 1 if answer.end > 0 else -1
    top = answer.highest[0] if sign > 0 else answer.lowest[0]
    end = answer.end_exact_number
    return 100 * max((top - end) * sign, arb(0)) / abs(end)


def opposite(answer):
    bottom = -answer.lowest[0] if answer.end > 0 else answer.highest[0]
    return 100 * max(bottom, arb(0)) / abs(answer.end_exact_number)


def rise(answer):
    end = answer.end_exact_number
    low, high = answer.first_reach(end / 10), answer.first_reach(9 * end / 10)
    return None if low is None or high is None else high - low


def peak_time(answer):
    time = (answer.highest if answer.end > 0 else answer.lowest)[1]
    return None if time == math.inf else time


def settling(part):
    return lambda answer: answer.last_outside(abs(answer.end_exact_number) * arb(part) / 100)


def static(order):
    def of(loop):
        if any(loop.below[i] != 0 for i in range(order)):
            return math.inf
        return abs(arb(loop.below[order] / loop.closed[0])) * (100 if order == 0 else 1)

    return of


def largest(name):
    def of(loop):
        answer = loop.answer(name)
        return answer and max(abs(answer.highest[0]), abs(answer.lowest[0]))

    return of


FIGURES = {
    "damping-ratio": over_poles(lambda pole: -pole.real / abs(pole)),
    "decay-rate": over_poles(lambda pole: -pole.real),
    "natural-frequency-minimum": over_poles(abs),
    "natural-frequency-maximum": over_poles(abs),
    "gain-margin-up": decibel("gain_up"),
    "gain-margin-down": decibel("gain_down"),
    "phase-margin": lambda loop: loop.frequency.phase_margin,
    "delay-margin": lambda loop: loop.frequency.delay_margin,
    "peak-sensitivity": lambda loop: loop.frequency.peak[0],
    "bandwidth": lambda loop: loop.frequency.bandwidth,
    "overshoot": of_output(beyond),
    "undershoot": of_output(opposite),
    "rise-time": of_output(rise),
    "settling-time-2": of_output(settling(2)),
    "settling-time-5": of_output(settling(5)),
    "peak-time": of_output(peak_time),
    "step-error": static(0),
    "ramp-error": static(1),
    "parabola-error": static(2),
    "load-peak": largest("load"),
    "load-final": lambda loop: loop.answer("load") and abs(loop.answer("load").end_exact_number),
    "controller-peak": largest("controller"),
}
