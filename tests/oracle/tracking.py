"""Following one root of F(s, q) along the knob, with proof that it stays the same root.

A disc around c holds exactly m roots of a(u) = F(c + u, q) for every q of an interval if |a_m| r^m > Σ_{k≠m} |a_k| r^k with every
coefficient at its worst (A. E. Pellet, Sur un mode de séparation des racines des équations, Bull. Sci. Math. 5, 1881). Two vertices
in one such disc with m = 1 are the same root. `fast` does this in f64 for all segments at once, with bounds on the rounding;
`Follower` does it in ball arithmetic for the ones that remain, in steps as small as they must be.
"""

from dataclasses import dataclass, fields
from math import comb

import numpy as np
from flint import acb, acb_poly, arb, arb_poly, fmpq

from certified import precision, roots

#: Bits of the slow follower: order 40 loses some 250 of them.
FOLLOW_BITS = 640
#: Steps after which a follower gives up; near a double root it needs some four for every halving of the distance.
FOLLOW_STEPS = 3000
#: Halvings of one segment after which its root is said to be not separable: 2^-SMALLEST_STEP of the segment.
SMALLEST_STEP = 160
#: A disc no smaller than 2^-SETTLED_BITS of its centre's modulus is tried around a root: less drowns in the rounding.
SETTLED_BITS = 150
#: Newton steps towards a root that is known to be near.
NEWTON_STEPS = 60
#: Radii tried for a disc, in distances between its vertices.
FAST_RADII = (1.2, 2.0, 3.2, 5.5, 20.0, 60.0)
#: Halvings of a segment in f64 before it goes to the slow follower.
HALVINGS = 16
#: Pieces of one segment that may be without proof at a time; next to a multiple point more would never end.
OPEN_PIECES = 24
EPSILON = np.finfo(float).eps
#: f64 rounding of a product of n factors, in units of n·EPSILON: each factor and each addition rounds once.
ROUNDINGS = 4

# Overflow and division by zero make a disc fail, which is what they should do.
np.seterr(all="ignore")


def up(coefficients, off):
    """Coefficients of a polynomial times (u + off)."""
    raised = coefficients * off
    raised[:, 1:] += coefficients[:, :-1]
    return raised


class Fast:
    """The loop in factored f64, evaluated for many points at once."""

    def __init__(self, moving):
        self.parts = []
        for p in moving:
            listed = [complex(ball.real.mid(), ball.imag.mid()) for ball, m in roots(p) for _ in range(m)]
            lead = float(int(p.leading_coefficient())) if p.degree() >= 0 else 0.0
            self.parts.append((lead, np.array(listed, dtype=complex)))
        self.order = max(p.degree() for p in moving)
        self.noise = ROUNDINGS * (self.order + 1) * EPSILON

    def taylor(self, centers):
        """For every part the coefficients around the centres, and bounds on their errors: of the rounding of each step, and of the
        poles and zeros themselves, which are rounded to f64."""
        found = []
        for lead, listed in self.parts:
            plain = np.zeros((len(centers), self.order + 1), dtype=complex)
            size, moved = np.zeros((2, len(centers), self.order + 1))
            plain[:, 0], size[:, 0] = lead, abs(lead)
            for root in listed:
                off = (centers - root)[:, None]
                moved = up(moved, abs(off)) + size * (EPSILON * abs(root))
                plain, size = up(plain, off), up(size, abs(off))
            found.append((plain, moved + size * self.noise))
        return found

    def discs(self, start, end, q0, q1):
        """The largest radius tried of a disc around the middle of each segment with one root all along; 0 where none is proven."""
        middle, half = (q0 + q1) / 2, abs(q1 - q0) / 2
        center, apart = (start + end) / 2, abs(end - start)
        size, worst = self.sizes(center, middle, half)
        radius = np.zeros(len(center))
        powers = np.arange(self.order + 1)
        # A root that comes back moves farther than its ends are apart.
        apart = apart / 2 + np.where(size[:, 1] > 0, (size[:, 0] + worst[:, 0]) / size[:, 1], 0) / 2
        for factor in FAST_RADII:
            trial = apart * factor
            scaled = trial[:, None] ** powers
            others = (size + worst) * scaled
            most = others.sum(axis=1) - others[:, 1]
            good = (size[:, 1] - worst[:, 1]) * trial > most
            radius = np.where(good, trial, radius)
        return center, radius

    def sizes(self, center, middle, half):
        """|a_k| at the middle of the knob's interval, and how much less or more it may be: a Taylor sum in the knob."""
        around = self.taylor(center)
        worst = np.zeros((len(center), self.order + 1))
        for j in range(len(around)):
            slope = np.zeros((len(center), self.order + 1), dtype=complex)
            for k in range(j, len(around)):
                slope += around[k][0] * (comb(k, j) * middle ** (k - j))[:, None]
            if j == 0:
                total = slope
            else:
                worst += abs(slope) * (half**j)[:, None]
        for k, (_, error) in enumerate(around):
            worst += error * ((abs(middle) + half) ** k)[:, None]
        return abs(total), worst

    def value_and_slope(self, s, q):
        """F and dF/ds with a bound on the rounding of F."""
        value, slope, noise = np.zeros_like(s), np.zeros_like(s), np.zeros(len(s))
        for k, (lead, listed) in enumerate(self.parts):
            f, df, size, moved = np.full_like(s, lead), np.zeros_like(s), np.full(len(s), abs(lead)), np.zeros(len(s))
            for root in listed:
                off = s - root
                df = df * off + f
                f = f * off
                moved = moved * abs(off) + size * (EPSILON * abs(root))
                size = size * abs(off)
            value, slope = value + q**k * f, slope + q**k * df
            noise = noise + abs(q) ** k * (moved + size * self.noise)
        return value, slope, noise

    def newton(self, s, q, steps=12):
        """Roots near s, without proof."""
        for _ in range(steps):
            value, slope, _ = self.value_and_slope(s, q)
            step = np.where(slope != 0, value / slope, 0)
            s = s - step
            if not (abs(step) > abs(s) * 2 * EPSILON).any():
                break
        return s

    def root_distance(self, s, q):
        """A bound on the distance to the nearest root: n |F / F′|, rounding included."""
        value, slope, noise = self.value_and_slope(s, q)
        return self.order * (abs(value) + noise) / abs(slope)


    def turning(self, s, q0, q1):
        """A knob between q0 and q1 at which the root is about at s: −D/N for a knob that enters once, else the middle."""
        middle = (q0 + q1) / 2
        if len(self.parts) > 2:
            return middle
        d, n = (lead * np.prod(s[:, None] - listed[None, :], axis=1) for lead, listed in self.parts)
        q = np.real(-d / n)
        return np.where((q - q0) * (q - q1) < 0, q, middle)

    def pieces(self, s, q):
        """Pieces of a polyline with one root in a disc all along each; longer segments are halved up to HALVINGS times."""
        work = Pieces(np.arange(len(s) - 1), s[:-1], s[1:], q[:-1], q[1:])
        done, left = [], []
        for _ in range(HALVINGS):
            work.center, work.radius = self.discs(work.s0, work.s1, work.q0, work.q1)
            off = np.maximum(self.root_distance(work.s0, work.q0), self.root_distance(work.s1, work.q1))
            sure = (work.radius > 0) & (abs(work.s1 - work.s0) / 2 + off <= work.radius)
            done.append(work.where(sure))
            lost = work.where(~sure)
            hopeless = off[~sure] > abs(lost.s1 - lost.s0)
            crowded = np.bincount(lost.segment, minlength=len(s)) > OPEN_PIECES
            given_up = crowded | (np.bincount(lost.segment, weights=hopeless, minlength=len(s)) > 0)
            left.append(np.flatnonzero(given_up))
            work = lost.where(~given_up[lost.segment])
            if not len(work.segment):
                break
            knob = self.turning((work.s0 + work.s1) / 2, work.q0, work.q1)
            work = work.halved(knob, self.newton((work.s0 + work.s1) / 2, knob))
        return Pieces.joined(done), np.unique(np.concatenate([*left, work.segment]))


@dataclass
class Pieces:
    """Arrays, one entry a piece of a segment."""

    segment: np.ndarray
    s0: np.ndarray
    s1: np.ndarray
    q0: np.ndarray
    q1: np.ndarray
    center: np.ndarray | None = None
    radius: np.ndarray | None = None

    def where(self, mask):
        return Pieces(*(getattr(self, f.name)[mask] for f in fields(self)))

    def halved(self, knob, s):
        first = (self.segment, self.s0, s, self.q0, knob)
        second = (self.segment, s, self.s1, knob, self.q1)
        return Pieces(*(np.concatenate(pair) for pair in zip(first, second)))

    @staticmethod
    def joined(parts):
        """All pieces in the order of |knob|."""
        whole = [np.concatenate([getattr(p, f.name) for p in parts]) for f in fields(Pieces)]
        order = np.argsort(abs(whole[3]), kind="stable")
        return Pieces(*(a[order] for a in whole))


class Lost(ArithmeticError):
    """A root could not be told from its neighbours: at or next to a multiple point."""


class Follower:
    """The loop in ball arithmetic; the knob is an exact rational."""

    def __init__(self, moving):
        with precision(FOLLOW_BITS):
            self.polys = [acb_poly(p) for p in moving]
        self.order = max(p.degree() for p in moving)

    def coefficients(self, center, middle, half):
        """(size, worst) of the coefficients around a centre for a knob within half of middle."""
        shift, q, h = acb_poly([center, 1]), arb(middle), arb(abs(half))
        around = [p(shift) for p in self.polys]
        spread = [arb(0)] * (self.order + 1)
        for j in range(len(around)):
            slope = acb_poly([])
            for k in range(j, len(around)):
                slope += around[k] * acb(comb(k, j) * q ** (k - j))
            if j == 0:
                total = slope
            else:
                for k, c in enumerate(slope.coeffs()):
                    spread[k] += abs(c) * h**j
        size = [abs(c) for c in total.coeffs()]
        return size + [arb(0)] * (self.order + 1 - len(size)), spread

    def holds(self, center, q0, q1, count, radius):
        """True if the disc surely has `count` roots for every knob between q0 and q1."""
        with precision(FOLLOW_BITS):
            listed = self.coefficients(center, (q0 + q1) / 2, (q1 - q0) / 2)
            return self.pellet(listed, count, arb(radius))

    @staticmethod
    def pellet(listed, count, radius):
        size, spread = listed
        most = [a + b for a, b in zip(size, spread)]
        most[count] = arb(0)
        return bool((size[count] - spread[count]) * radius**count > arb_poly(most)(radius))

    def newton(self, s, q):
        """The root near s at a knob, to some FOLLOW_BITS / 2 bits, without proof."""
        total = acb_poly([])
        for k, p in enumerate(self.polys):
            total += p * acb(arb(q) ** k)
        slope = total.derivative()
        for _ in range(NEWTON_STEPS):
            down = slope(s)
            if down.contains(0):
                raise Lost(f"slope vanishes at {s.str(12)}")
            step = total(s) / down
            s = acb((s - step).real.mid(), (s - step).imag.mid())
            if abs(step) <= abs(s) * arb(2) ** -(FOLLOW_BITS // 3) or step.contains(0):
                return s
        raise Lost(f"no root near {s.str(12)}")

    def follow(self, s, q0, q1):
        """The root at q1 that the one next to s at q0 becomes."""
        with precision(FOLLOW_BITS):
            s = self.settle(acb(s), q0)
            step, span, q = q1 - q0, abs(q1 - q0), q0
            for _ in range(FOLLOW_STEPS):
                if q == q1:
                    return s
                if abs(step) > abs(q1 - q):
                    step = q1 - q
                ahead = self.step(s, q, q + step)
                if ahead is None:
                    step /= 4
                    if abs(step) < span / 2**SMALLEST_STEP:
                        raise Lost(f"not separable at {s.str(12)}, knob {float_of(q)!r}")
                else:
                    s, q, step = ahead, q + step, step * 2
            raise Lost(f"more than {FOLLOW_STEPS} steps from {s.str(12)}")

    def settle(self, s, q):
        """The one root next to s, as far as it can be told from the others."""
        root = self.newton(s, q)
        reach = 2 * abs(root - s) + abs(s) * arb(2) ** -SETTLED_BITS
        if reach.contains(0) or self.pellet(self.coefficients(s, q, fmpq(0)), 1, reach):
            return root
        raise Lost(f"no single root next to {s.str(12)}")

    def step(self, s, q0, q1):
        """The root after a step, or None where it is not proven to be the same one."""
        try:
            ahead = self.newton(s, q1)
        except Lost:
            return None
        listed = self.coefficients(s, (q0 + q1) / 2, (q1 - q0) / 2)
        if listed[0][1].contains(0):
            return None
        # A root that comes back moves farther than its ends are apart.
        apart = abs(ahead - s) + listed[1][0] / listed[0][1] + abs(s) * arb(2) ** -200 + arb(2) ** -FOLLOW_BITS
        return ahead if any(self.pellet(listed, 1, apart * factor) for factor in (1.2, 2.5, 6)) else None


def float_of(value):
    """A flint rational as f64."""
    return int(value.p) / int(value.q)


def reversed_knob(moving):
    """F with q replaced by 1/q, times its power: for the last segment into a zero."""
    return list(reversed(moving))


def fraction(value):
    """An f64 as a flint rational."""
    top, bottom = float(value).as_integer_ratio()
    return fmpq(top, bottom)
