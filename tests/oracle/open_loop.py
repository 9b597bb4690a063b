"""The open loop over frequency, worked out anew: every crossing, the margins, peak sensitivity and bandwidth.

Signs are looked at on a grid of frequencies, crowded where a root lies near the axis; every change is refined in ball arithmetic.
"""

import math
from functools import cached_property

import numpy as np
from flint import acb, arb, ctx

from refining import BITS, axis_root, middle, roots, value

#: Frequencies per decade, and decades beyond the outermost root.
PER_DECADE = 40
DECADES_BEYOND = 2.5
#: Frequencies on each side of a root near the axis, from well inside its width outwards.
AROUND_A_ROOT = 120


def log_size(values):
    """ln|values|, finite at zeros too."""
    return np.log(np.maximum(np.abs(values), 1e-300))


class Frequency:
    """The open loop N/D over frequency."""

    def __init__(self, loop):
        ctx.prec = BITS
        self.loop = loop
        self.n, self.d, self.f = loop.above, loop.below, loop.closed
        self.t = loop.parts["output"]
        self.roots = {name: roots(getattr(self, name)) for name in "ndft"}
        self.lone = [float(abs(ball.imag).mid()) for name in "nd" for ball in self.roots[name] if ball.real.contains(0)]
        self.omegas = self.grid()
        self.at = {name: self.product(name) for name in "ndft"}

    def grid(self):
        """Frequencies a few decades beyond all roots, crowded at roots near the axis."""
        every = [complex(ball) for balls in self.roots.values() for ball in balls if not ball.contains(0)]
        sizes = [abs(z) for z in every] or [1.0]
        low, high = math.log10(min(sizes)) - DECADES_BEYOND, math.log10(max(sizes)) + DECADES_BEYOND
        found = [np.logspace(low, high, int((high - low) * PER_DECADE))]
        for z in every:
            if z.imag > 0 and abs(z.real) < 0.5 * abs(z):
                offsets = np.geomspace(max(abs(z.real) / 20, 1e-13 * abs(z)), 0.7 * z.imag, AROUND_A_ROOT)
                found += [[z.imag], z.imag + offsets, z.imag - offsets]
        omegas = np.unique(np.concatenate(found))
        return omegas[omegas > 0]

    def sharpness(self, omega):
        """|d ln L/d ln ω|: how many times a relative error of ω comes back in L."""
        w = arb(omega)
        slope = self.exact("n", w, True) / self.exact("n", w) - self.exact("d", w, True) / self.exact("d", w)
        return omega * float(abs(slope).mid())

    def product(self, name):
        """A polynomial on the grid, from its roots."""
        poly, s = getattr(self, name), 1j * self.omegas
        total = np.full(len(s), complex(acb(poly[poly.degree()])) if poly != 0 else 0j)
        for ball in self.roots[name]:
            total = total * (s - complex(ball))
        return total

    def exact(self, name, omega, slope=False):
        poly = getattr(self, name)
        return value(poly.derivative() if slope else poly, acb(0, omega))

    def changes(self, z, f):
        """Refined places where z changes sign on the grid, or turns so near to 0 that it may."""
        found = [axis_root(f, self.omegas[i], self.omegas[i + 1]) for i in np.flatnonzero(np.sign(z[:-1]) * np.sign(z[1:]) < 0)]
        size = np.abs(z)
        same = (np.sign(z[:-2]) == np.sign(z[1:-1])) & (np.sign(z[1:-1]) == np.sign(z[2:]))
        for i in np.flatnonzero(same & (size[1:-1] < size[:-2]) & (size[1:-1] < size[2:])) + 1:
            inner = np.linspace(self.omegas[i - 1], self.omegas[i + 1], 41)
            signs = [float(f(arb(float(w)))) for w in inner]
            found += [axis_root(f, inner[k], inner[k + 1]) for k in range(40) if signs[k] * signs[k + 1] < 0]
        return sorted(found, key=float)

    @cached_property
    def gain_crossings(self):
        """(ω, turn in degrees, delay) where |L| = 1."""
        if self.n == 0:
            return []
        z = log_size(self.at["n"]) - log_size(self.at["d"])
        f = lambda w: middle(abs(self.exact("n", w)) - abs(self.exact("d", w)))
        found = []
        for w in self.changes(z, f):
            turn = float(middle((-self.exact("n", w) / self.exact("d", w)).arg())) * 180 / math.pi
            lag = turn if turn > 0 else turn + 360
            found.append((float(w), turn, lag * math.pi / 180 / float(w)))
        return found

    @cached_property
    def phase_crossings(self):
        """(ω, factor) where L is real and negative; 0 and infinity too."""
        if self.n == 0:
            return []
        product = self.at["n"] * np.conj(self.at["d"])
        f = lambda w: middle((self.exact("n", w) * self.exact("d", w).conjugate()).imag)
        found = []
        for w in self.changes(product.imag / np.maximum(np.abs(product), 1e-300), f):
            if any(abs(float(w) - lone) <= 1e-9 * lone for lone in self.lone):
                continue
            factor = float(middle((-self.exact("d", w) / self.exact("n", w)).real))
            if factor > 0:
                found.append((float(w), factor))
        ends = [(0.0, self.d[0], self.n[0])]
        if self.n.degree() == self.d.degree():
            ends.append((math.inf, self.d[self.d.degree()], self.n[self.n.degree()]))
        for w, below, above in ends:
            if above != 0 and -below / above > 0:
                found.append((w, float(arb(-below / above))))
        return sorted(found)

    @property
    def gain_up(self):
        return min((factor for _, factor in self.phase_crossings if factor > 1), default=math.inf)

    @property
    def gain_down(self):
        return min((1 / factor for _, factor in self.phase_crossings if factor < 1), default=math.inf)

    @property
    def phase_margin(self):
        return min((abs(turn) for _, turn, _ in self.gain_crossings), default=math.inf)

    @property
    def delay_margin(self):
        return min((delay for _, _, delay in self.gain_crossings), default=math.inf)

    @cached_property
    def peak(self):
        """The largest |D/F| and its frequency."""
        z = log_size(self.at["d"]) - log_size(self.at["f"])
        slope = lambda w: middle((self.exact("d", w, True) / self.exact("d", w) - self.exact("f", w, True) / self.exact("f", w)).imag)
        found = [(abs(float(arb(self.d[0] / self.f[0]))), 0.0)]
        if self.d.degree() == self.f.degree():
            k = self.d.degree()
            found.append((abs(float(arb(self.d[k] / self.f[k]))), math.inf))
        tops = np.flatnonzero((z[1:-1] >= z[:-2]) & (z[1:-1] > z[2:])) + 1
        for i in tops[z[tops] > z[tops].max(initial=-math.inf) - 0.05]:
            # The slope of log|D/F| over ω is −Im of D′/D − F′/F.
            w = axis_root(slope, self.omegas[i - 1], self.omegas[i + 1])
            found.append((float(middle(abs(self.exact("d", w) / self.exact("f", w)))), float(w)))
        return max(found)

    @cached_property
    def bandwidth(self):
        """The first ω at which |T| falls 3 dB below |T(0)|; None without a static gain."""
        if self.t[0] == 0:
            return None
        static = abs(arb(self.t[0] / self.f[0]))
        z = log_size(self.at["t"]) - log_size(self.at["f"]) - math.log(float(static)) + math.log(2) / 2
        f = lambda w: middle(abs(self.exact("t", w) / self.exact("f", w)) ** 2 * 2 - static**2)
        below = np.flatnonzero(z < 0)
        first = int(below[0]) if len(below) else len(z) - 1
        found = self.changes(z[: first + 1], f) if first else []
        return float(found[0]) if found else math.inf
