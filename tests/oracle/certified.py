"""Certified facts about one polynomial in s: its roots as balls, and how many lie where.

Roots come from `fmpz_poly.complex_roots` of FLINT (F. Johansson, Arb: efficient arbitrary-precision midpoint-radius interval
arithmetic, IEEE Trans. Computers 66, 2017): balls that are proven to hold one root each, real roots with an imaginary part of
exactly zero, multiplicities from the squarefree decomposition. How many roots lie on the imaginary axis is decided without any
rounding: p(jw) = e(x) + jw·o(x), x = w², has an axis root where gcd(e, o) has a positive one. The precision then grows until
every other root is proven to be off the axis.
"""

from contextlib import contextmanager
from dataclasses import dataclass

from flint import ctx, fmpz_poly

#: Bits of a plain root; enough to compare with f64 figures.
ROOT_BITS = 96
#: Bits at which telling a root from the axis is given up; a root nearer than that is a bug of the oracle.
MOST_BITS = 1 << 14


@contextmanager
def precision(bits):
    """Ball arithmetic at this precision inside the `with` block."""
    before = ctx.prec
    ctx.prec = bits
    try:
        yield
    finally:
        ctx.prec = before


def roots(poly, bits=ROOT_BITS):
    """`[(ball, multiplicity)]` of an integer polynomial."""
    if poly.degree() < 1:
        return []
    with precision(bits):
        return poly.complex_roots()


def is_real(ball):
    """True for a root proven real."""
    return ball.imag.is_zero()


def even_odd(poly):
    """e and o of poly(jw) = e(x) + jw·o(x), x = w²."""
    coefficients = [int(c) for c in poly.coeffs()]
    even = [c if i % 2 == 0 else -c for i, c in enumerate(coefficients[0::2])]
    odd = [c if i % 2 == 0 else -c for i, c in enumerate(coefficients[1::2])]
    return fmpz_poly(even), fmpz_poly(odd)


@dataclass(frozen=True)
class Axis:
    """The roots of a polynomial on the imaginary axis."""

    at_origin: int
    pairs: tuple  # of (x ball, multiplicity), x = w²

    @property
    def count(self):
        return self.at_origin + 2 * sum(m for _, m in self.pairs)

    @property
    def repeated(self):
        return self.at_origin > 1 or any(m > 1 for _, m in self.pairs)


def axis_roots(poly):
    """Exactly which roots lie on the axis."""
    at_origin = 0
    while poly[at_origin] == 0:
        at_origin += 1
    even, odd = even_odd(fmpz_poly(poly.coeffs()[at_origin:]))
    common = even.gcd(odd)
    pairs = [(x.real, m) for x, m in roots(common) if is_real(x) and x.real > 0]
    return Axis(at_origin, tuple(pairs))


@dataclass(frozen=True)
class Kinds:
    """How many roots of which kind a polynomial has."""

    right: int
    axis: int
    real: int
    pairs: int
    name: str


def kinds(poly):
    """Counts and the trade's word for a polynomial in s."""
    axis = axis_roots(poly)
    bits = ROOT_BITS
    while True:
        found = roots(poly, bits)
        undecided = sum(m for ball, m in found if ball.real.contains(0))
        if undecided == axis.count:
            break
        bits *= 2
        if bits > MOST_BITS:
            raise ArithmeticError(f"roots of {poly} not told from the axis with {MOST_BITS} bits")
    right = sum(m for ball, m in found if ball.real > 0)
    real = sum(m for ball, m in found if is_real(ball))
    pairs = (poly.degree() - real) // 2
    repeated_real = any(m > 1 for ball, m in found if is_real(ball))
    return Kinds(right, axis.count, real, pairs, name(right, axis, pairs, repeated_real))


def name(right, axis, pairs, repeated_real):
    """The word of the trade, as the record defines it."""
    if right or axis.repeated:
        return "unstable"
    if axis.count:
        return "marginally stable"
    if pairs:
        return "underdamped"
    return "critically damped" if repeated_real else "overdamped"
