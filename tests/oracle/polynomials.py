"""Polynomials in s and the knob in exact rationals, and the loops closed with them.

A `Knobbed` is a list of polynomials in s, one for every power of the knob. A `Ratio` is a quotient of two of them; it is never
cancelled, so a factor common to numerator and denominator stays a fixed mode. `Characteristic` is the polynomial of the closed loop
in integers. Nothing here reads a text of the notation: the cases carry text and value side by side, written by two hands.
"""

from fractions import Fraction
from functools import reduce
from math import gcd, lcm

from flint import fmpq, fmpq_poly, fmpz_poly


def rational(value):
    """An exact rational from an int, a decimal text or a Fraction."""
    fraction = Fraction(value)
    return fmpq(fraction.numerator, fraction.denominator)


def fraction_of(value):
    """A Fraction from a flint rational."""
    return Fraction(int(value.p), int(value.q))


class Knobbed:
    """A polynomial in s and the knob; `powers[k]` multiplies the k-th power of the knob."""

    def __init__(self, powers):
        powers = [fmpq_poly(power) for power in powers]
        while len(powers) > 1 and powers[-1] == 0:
            powers.pop()
        self.powers = powers

    def __add__(self, other):
        length = max(len(self.powers), len(other.powers))
        zero = fmpq_poly()
        mine = self.powers + [zero] * (length - len(self.powers))
        theirs = other.powers + [zero] * (length - len(other.powers))
        return Knobbed([a + b for a, b in zip(mine, theirs)])

    def __mul__(self, other):
        powers = [fmpq_poly() for _ in range(len(self.powers) + len(other.powers) - 1)]
        for i, a in enumerate(self.powers):
            for k, b in enumerate(other.powers):
                powers[i + k] += a * b
        return Knobbed(powers)

    def __neg__(self):
        return Knobbed([-power for power in self.powers])


def polynomial(*coefficients):
    """A polynomial in s from exact coefficients, lowest power first; no knob in it."""
    return Knobbed([fmpq_poly([rational(c) for c in coefficients])])


class Ratio:
    """A quotient of two `Knobbed`, as written, never cancelled."""

    def __init__(self, numerator, denominator=None):
        self.numerator = numerator
        self.denominator = denominator or polynomial(1)

    def __mul__(self, other):
        return Ratio(self.numerator * other.numerator, self.denominator * other.denominator)

    def __truediv__(self, other):
        return Ratio(self.numerator * other.denominator, self.denominator * other.numerator)

    def __add__(self, other):
        return Ratio(
            self.numerator * other.denominator + other.numerator * self.denominator,
            self.denominator * other.denominator,
        )

    def __pow__(self, exponent):
        return reduce(Ratio.__mul__, [self] * exponent, number(1))


def number(value):
    """A constant."""
    return Ratio(polynomial(value))


def laplace():
    """The variable s."""
    return Ratio(polynomial(0, 1))


def knob():
    """The knob itself."""
    return Ratio(Knobbed([[], [1]]))


class Characteristic:
    """The characteristic polynomial F(s, q) = Σ q^k F_k(s) in coprime integers, with its fixed modes split off."""

    def __init__(self, knobbed):
        denominators = [int(p.denom()) for p in knobbed.powers]
        scale = lcm(*denominators)
        powers = [fmpz_poly((p * scale).numer()) for p in knobbed.powers]
        content = reduce(gcd, (int(c) for p in powers for c in p.coeffs()), 0)
        self.powers = [fmpz_poly([int(c) // content for c in p.coeffs()]) for p in powers]
        self.knob_degree = len(self.powers) - 1
        self.order = max(p.degree() for p in self.powers)
        self.fixed = reduce(lambda a, b: a.gcd(b), self.powers)
        self.moving = [p // self.fixed for p in self.powers]
        self.affine = self.knob_degree == 1

    @staticmethod
    def closed(controller, plant, sensor, positive_feedback):
        """Of the loop 1 ± controller · plant · sensor."""
        loop = controller * plant * sensor
        numerator = -loop.numerator if positive_feedback else loop.numerator
        return Characteristic(loop.denominator + numerator)

    def at(self, value):
        """F(s, value) as an integer polynomial (times a positive number) for a rational value of the knob."""
        return at_knob(self.powers, value)

    def coefficients(self):
        """`[i][k]` multiplies s^i q^k."""
        return [[int(p[i]) for p in self.powers] for i in range(self.order + 1)]


def at_knob(powers, value):
    """Σ value^k powers[k] times value.q^degree, which is positive."""
    degree = len(powers) - 1
    total = fmpz_poly()
    for k, power in enumerate(powers):
        total += power * (value.p**k * value.q ** (degree - k))
    return total
