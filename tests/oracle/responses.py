"""A loop at one value of the knob, worked out anew: its poles and its answers to steps.

Block polynomials are exact rationals. Poles are proven balls of FLINT at `BITS`, answers to a step are partial fractions in ball
arithmetic of that precision, so that some forty digits are right. Times and peaks are found on a fine grid of f64 values and refined
in ball arithmetic.
"""

import math
from functools import cached_property

import numpy as np
from flint import acb, arb, ctx, fmpq, fmpq_poly

from open_loop import Frequency
from polynomials import rational
from refining import BITS, axis_root, middle, roots, value

#: Bits and size of the nudge that tells repeated poles apart: it changes an answer by less than forty digits show.
NUDGED_BITS = 900
NUDGE = fmpq(1, 10**80)
#: Shares this many times larger than the answer cancel so much that f64 is not enough.
CANCELLING = 1e6
#: Time steps per radian of the fastest mode still alive, values in one block, and values after which a search is given up.
PER_RADIAN = 12.0
BLOCK = 256
#: Values that two blocks share.
OVERLAP = 8
MOST_VALUES = 600_000
#: A mode below this part of the largest one no longer sets the time step.
ALIVE = 1e-8


def block_at(ratio, knob):
    """Numerator and denominator of a block at a knob value, never cancelled."""
    parts = (ratio.numerator, ratio.denominator)
    return tuple(sum((power * knob**k for k, power in enumerate(part.powers)), fmpq_poly()) for part in parts)


class GivenUp(ArithmeticError):
    """A search took too many values: the oracle has no say in this figure."""


class LoopAt:
    """The loop of a case at a rational knob value."""

    def __init__(self, case, knob):
        ctx.prec = BITS
        (nc, dc), (np_, dp), (nh, dh) = (block_at(block, knob) for block in case.blocks)
        self.above, self.below = nc * np_ * nh, dc * dp * dh
        if case.positive:
            self.above = -self.above
        self.closed = self.below + self.above
        self.gain = fmpq(1)
        if nh[0] != 0 and dh[0] != 0:
            self.gain = nh[0] / dh[0]
        self.parts = {"output": nc * np_ * dh * self.gain, "load": np_ * dc * dh, "controller": nc * dp * dh}

    @cached_property
    def poles(self):
        """All poles with multiplicity."""
        return roots(self.closed)

    @cached_property
    def stable(self):
        """Whether all lie left of the axis; a pole not told from the axis at `BITS` is on it."""
        return self.closed.degree() >= 0 and all(pole.real < 0 for pole in self.poles)

    def answer(self, name):
        """The answer `output`, `load` or `controller` to its step; None where it holds an impulse."""
        if name not in self.answers:
            above = self.parts[name]
            self.answers[name] = Answer(above, self.closed) if above.degree() <= self.closed.degree() else None
        return self.answers[name]

    @staticmethod
    def at_knob(case, knob):
        """The loop at another knob value, given in f64 or as a Fraction."""
        return LoopAt(case, rational(knob))

    @cached_property
    def answers(self):
        return {}

    @cached_property
    def frequency(self):
        return Frequency(self)


class Answer:
    """y(t) = end + Σ c·exp(p·t) for a unit step through above/below, which is stable."""

    def __init__(self, above, below):
        common = above.gcd(below) if above != 0 else fmpq_poly([1])
        above, below = above / common, below / common
        self.reduced, self.bits = (above, below), BITS
        if below.gcd(below.derivative()).degree() > 0:
            below, self.bits = below + below[0] * NUDGE, NUDGED_BITS
        ctx.prec = self.bits
        slope = below.derivative()
        self.end_exact = above[0] / below[0]
        self.poles = roots(below)
        self.shares = [value(above, p) / (p * value(slope, p)) for p in self.poles]
        degree = below.degree()
        self.start_exact = above[degree] / below[degree] if above.degree() == degree else fmpq(0)
        ctx.prec = BITS
        self.end, self.start = float(arb(self.end_exact)), float(arb(self.start_exact))
        self.p = np.array([complex(p) for p in self.poles] or [-1.0])
        self.c = np.array([complex(c) for c in self.shares] or [0.0])
        # Rounding of the f64 values; where shares nearly cancel the balls are used throughout.
        self.scale = max(abs(self.end), abs(self.start), float(np.abs(self.end + self.c.real.sum())))
        self.cancels = np.abs(self.c).sum() > CANCELLING * max(self.scale, 1e-300)
        upper = self.p.imag >= 0
        self.p_up = self.p[upper]
        self.c_up = self.c[upper] * np.where(self.p_up.imag > 0, 2, 1)

    def exact(self, t, order=0):
        """y(t), or its derivative, as a number of high precision."""
        ctx.prec = self.bits
        total = acb(self.end_exact if order == 0 else 0)
        for p, c in zip(self.poles, self.shares):
            total += c * (p * t).exp() * p**order
        ctx.prec = BITS
        return middle(total.real)

    def values(self, times):
        """y at many times, in f64."""
        if self.cancels:
            return np.array([float(self.exact(arb(float(t)))) for t in times])
        return self.end + (self.c_up * np.exp(np.outer(times, self.p_up))).real.sum(axis=1)

    def envelope(self, t):
        """A bound on |y(τ) − end| for every τ ≥ t."""
        return float((np.abs(self.c) * np.exp(self.p.real * t)).sum())

    def step(self, t):
        """A time step that resolves what is alive at t."""
        sizes = np.abs(self.c) * np.exp(self.p.real * t)
        alive = sizes > ALIVE * max(sizes.max(), ALIVE * self.scale)
        fastest = np.abs(self.p[alive]).max(initial=0.0)
        return 1 / (PER_RADIAN * fastest) if fastest else 1 / np.abs(self.p).min()

    def quiet_after(self, bound):
        """A time after which the envelope stays below a bound."""
        if self.envelope(0.0) <= bound:
            return 0.0
        low, high = 0.0, 1 / np.abs(self.p.real).min()
        while self.envelope(high) > bound:
            high *= 2
        for _ in range(50):
            mid = (low + high) / 2
            low, high = (mid, high) if self.envelope(mid) > bound else (low, mid)
        return high

    def blocks(self, forward_from=0.0):
        """Overlapping blocks of times and values onward from a time."""
        t, h = forward_from, self.step(forward_from)
        for _ in range(MOST_VALUES // BLOCK):
            times = t + h * np.arange(BLOCK)
            yield times, self.values(times)
            # The overlap is longer than two steps of the next block, so that no turn hides at the seam.
            t, h = times[-OVERLAP], min(self.step(times[-OVERLAP]), 2 * h)
        raise GivenUp

    def blocks_back(self, t):
        """Overlapping blocks backward from a time to 0."""
        h = math.inf
        for _ in range(MOST_VALUES // BLOCK):
            if t <= 0:
                return
            h = min(h, self.step(max(0.0, t - BLOCK * min(h, self.step(t)))))
            times = np.maximum(t - h * np.arange(BLOCK), 0.0)
            times = times[: int(np.argmax(times == 0.0)) + 1] if times[-1] == 0.0 else times
            yield times, self.values(times)
            t = times[-OVERLAP] if times[-1] > 0 else 0.0
        raise GivenUp

    @cached_property
    def highest(self):
        """The largest value with its time; infinite time where the end is never exceeded."""
        return self.extreme(1)

    @cached_property
    def lowest(self):
        return self.extreme(-1)

    def extreme(self, sign):
        """The largest (1) or smallest (−1) value, refined, and its time."""
        best = [(sign * self.start, 0.0, 0.0)] if sign * self.start > sign * self.end else []
        tiny = 1e-12 * max(self.scale, abs(self.end))
        for times, y in self.blocks():
            z = sign * y
            for i in np.flatnonzero((z[1:-1] >= z[:-2]) & (z[1:-1] > z[2:])) + 1:
                best.append((vertex(z[i - 1 : i + 2]), times[i - 1], times[i + 1]))
            top = max((b[0] for b in best), default=-math.inf)
            best = [b for b in best if b[0] >= top - 1e-3 * abs(top - sign * self.end) - tiny]
            left = self.envelope(times[-2])
            if left <= tiny or sign * self.end + left < top:
                break
        refined = [(self.end_exact_number, math.inf)]
        for _, a, b in best:
            refined.append((self.exact(arb(0)), 0.0) if b == 0.0 else self.turn(a, b))
        return max(refined, key=lambda pair: sign * pair[0])

    @property
    def end_exact_number(self):
        return middle(arb(self.end_exact))

    def turn(self, a, b):
        """The extreme between two times around it, and its time."""
        t = axis_root(lambda t: self.exact(t, 1), a, b)
        return self.exact(t), float(t)

    def first_reach(self, level):
        """The first time at which y has come to a level between start and end or beyond; 0 where it starts there."""
        sign = 1 if self.end >= 0 else -1
        room = lambda t: (self.exact(t) - level) * sign
        if sign * self.start >= sign * float(level):
            return 0.0
        for times, y in self.blocks():
            found = self.first_inside(times, sign * (y - float(level)), room)
            if found is not None:
                return found
            if self.envelope(times[-2]) < abs(self.end - float(level)):
                return None
        return None

    def last_outside(self, band):
        """The last time at which y is farther than the band from its end; 0 where it never is."""
        end = self.end_exact_number
        room = lambda t: abs(self.exact(t) - end) - band
        quiet = self.quiet_after(float(band))
        # A turn that just touches the band lies right at the quiet time where one pair is left: begin beyond it.
        for times, y in self.blocks_back(quiet + OVERLAP * self.step(quiet)):
            found = self.first_inside(times, np.abs(y - self.end) - float(band), room)
            if found is not None:
                return found
        return 0.0

    def first_inside(self, times, z, room):
        """Where `room` first rises above 0 in the order of the times; looks into turns between them too."""
        hits = np.flatnonzero(z >= 0)
        first = int(hits[0]) if len(hits) else len(z)
        turns = np.flatnonzero((z[1:-1] >= z[:-2]) & (z[1:-1] > z[2:])) + 1
        for i in turns[turns < first]:
            if vertex(z[i - 1 : i + 2]) > -2e-2 * (abs(z[i]) + np.ptp(z[i - 1 : i + 2])) - 1e-9 * self.scale:
                low, high = sorted((times[i - 1], times[i + 1]))
                _, top = self.turn(low, high)
                if room(arb(top)) >= 0:
                    return float(axis_root(room, times[i - 1], top))
        if first == len(z):
            return None
        if first == 0:
            return float(times[0])
        return float(axis_root(room, times[first - 1], times[first]))


def vertex(three):
    """The top of the parabola through three evenly spaced values."""
    a, b, c = (float(x) for x in three)
    bend = a - 2 * b + c
    return b - (a - c) ** 2 / (8 * bend) if bend else b
