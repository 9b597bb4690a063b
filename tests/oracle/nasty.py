"""Loops that break root finders, matchers and half-plane counts; each with the reason it is here.

The text of the blocks and the coefficients stand side by side. A polynomial is a list of factors, a factor a list of exact
coefficients, highest power first. F = D + qN for a knob that enters once; `powers` gives every power of the knob else.
"""

from fractions import Fraction

from cases import Case, decimal_text, project
from polynomials import Characteristic, Knobbed, polynomial

ONE = [[1]]


def product(factors):
    """The product of polynomials given by coefficients, highest power first."""
    total = polynomial(1)
    for factor in factors:
        total = total * polynomial(*reversed(factor))
    return total.powers[0]


def case(name, controller, plant, d=None, n=None, powers=None, sensor="1", feedback="negative", setting="1", quantities=()):
    """A case whose text and coefficients were written by two hands."""
    powers = [product(p) for p in (powers or [d, n])]
    document = project(name, controller, plant, sensor, feedback, setting=setting, quantities=quantities)
    return Case(name, document, Characteristic(Knobbed(powers)), Fraction(setting))


def text(factors):
    """Factors as typed, each in brackets."""
    return "".join(f"({polynomial_text(f)})" for f in factors)


def polynomial_text(coefficients):
    """A polynomial as typed from coefficients, highest power first."""
    terms = []
    for i, c in enumerate(coefficients):
        power, c = len(coefficients) - 1 - i, Fraction(c)
        if c:
            variable = "s" if power == 1 else f"s^{power}" if power else ""
            size = "" if abs(c) == 1 and power else decimal_text(abs(c))
            terms.append(("- " if c < 0 else "+ ") + f"{size} {variable}".strip())
    joined = " ".join(terms)
    return joined[2:] if joined.startswith("+ ") else "-" + joined[2:]


def plain(name, d, n, **more):
    """Controller K, plant N/D, both in factors."""
    return case(name, "K", f"{text(n)}/({text(d)})", d, n, **more)


def even():
    """Even and odd polynomials: poles on the axis for whole ranges; eigenvalue routines that never return."""
    yield plain("even: two resonances", [[1, 0, 1], [1, 0, 4]], ONE, setting="2.25")
    yield plain("even: s^4 + K", [[1, 0, 0, 0, 0]], ONE)
    yield plain("even: s^6 + K", [[1, 0, 0, 0, 0, 0, 0]], ONE)
    yield plain("odd: s^5 + K", [[1, 0, 0, 0, 0, 0]], ONE)
    yield case("even: s^8 - K by positive feedback", "K", "1/s^8", [[1] + [0] * 8], [[-1]], feedback="positive", setting="-3")
    yield plain("even: s^6 + 1 + K", [[1, 0, 0, 0, 0, 0, 1]], ONE)
    yield plain("even: zeros between resonances", [[1, 0, 1], [1, 0, 4], [1, 0, 9]], [[1, 0, 2], [1, 0, 5]])
    yield plain("even: zeros outside resonances", [[1, 0, 3], [1, 0, 4], [1, 0, 5]], [[1, 0, 1]], setting="-0.5")
    yield plain("even: real poles mirrored", [[1, 0, -1], [1, 0, -4]], ONE, setting="2.25")
    yield plain("even D, odd N", [[1, 0, 1], [1, 0, 4]], [[1, 0]])
    yield plain("odd D, even N", [[1, 0], [1, 0, 4]], [[1, 0, 1]])
    yield plain("undamped pair with rate feedback", [[1, 0, 4]], [[1, 0]], setting="4")


def meetings():
    """Multiple points of every multiplicity, exact and narrowly missed."""
    yield plain("triple real breakaway", [[1, 0], [1, 0], [1, 9]], [[1, 1]], setting="27")
    yield plain("quadruple breakaway", [[1, 1], [1, 3], [1, 4, 5]], ONE, setting="1")
    yield plain("complex breakaway", [[1, 2, 2], [1, 2, 5]], ONE, setting="2.25")
    yield plain("triple complex breakaway", [[1, 2, 3], [1, 4, 16, 24, 39]], ONE, setting="8")
    yield plain("double pole at the setting", [[1, 0], [1, 2]], ONE, setting="1")
    for miss in ["1e-3", "1e-5", "1e-6", "1e-8", "1e-10", "1e-12", "1e-16"]:
        off = Fraction(miss)
        yield plain(f"complex breakaway missed by the root of {miss}", [[1, 2, 2], [1, 2 + off, 5]], ONE, setting="2.25")
    for miss in ["1e-3", "-1e-3", "1e-6", "-1e-6", "1e-8", "-1e-8"]:
        off = Fraction(miss)
        yield plain(f"triple breakaway missed by {miss}", [[1, 0], [1, 0], [1, 9 + off]], [[1, 1]], setting="27")
    for miss in ["1e-3", "1e-5", "1e-7", "1e-8"]:
        off = Fraction(miss)
        yield plain(f"poles apart by {miss}", [[1, 2], [1, 2 + off], [1, 7]], [[1, 4]])
        yield plain(f"pole and zero apart by {miss}", [[1, 1], [1, 2], [1, 5]], [[1, 1 + off]])


def repeated():
    """Repeated poles and zeros: departure angles in fans, edges at zero gain."""
    yield plain("five equal lags", [[1, 1]] * 5, ONE, setting="0.5")
    yield plain("triple integrator with two zeros", [[1, 0]] * 3, [[1, 4], [1, 4]], setting="2")
    yield plain("double complex pole", [[1, 2, 2], [1, 2, 2], [1, 3]], ONE, setting="0.3")
    yield plain("triple complex pole and double complex zero", [[1, 2, 5]] * 3, [[1, 6, 10]] * 2)
    yield plain("double pair on the axis", [[1, 0, 4], [1, 0, 4], [1, 1]], [[1, 2]])
    yield plain("double zero on the axis", [[1, 1], [1, 2], [1, 3], [1, 4], [1, 5]], [[1, 0, 1], [1, 0, 1]])
    yield plain("double integrator", [[1, 0], [1, 0]], ONE)
    yield plain("zero at the origin", [[1, 1], [1, 2, 5]], [[1, 0]])
    yield plain("double zero at the origin", [[1, -1], [1, 2, 5], [1, 4]], [[1, 0], [1, 0]])
    yield plain("twelve equal lags", [[1, 2]] * 12, ONE, setting="100")


def fixed():
    """Cancelled factors: a fixed mode stays, and one on or right of the axis spoils every range."""
    yield case("cancelled lag", "K (s + 1)/(s + 5)", "1/((s + 1)(s + 2) s)", [[1, 5], [1, 1], [1, 2], [1, 0]], [[1, 1]])
    yield case("cancelled on the right", "K (s - 1)/(s + 3)", "1/((s - 1)(s + 2))", [[1, 3], [1, -1], [1, 2]], [[1, -1]])
    yield case("cancelled integrator", "K s/(s + 2)", "1/(s (s + 1)(s + 3))", [[1, 2], [1, 0], [1, 1], [1, 3]], [[1, 0]])
    yield case(
        "cancelled resonance",
        "K (s^2 + 4)/(s + 9)^2",
        "1/((s^2 + 4)(s + 1))",
        [[1, 9], [1, 9], [1, 0, 4], [1, 1]],
        [[1, 0, 4]],
    )
    yield case(
        "double fixed mode",
        "K (s + 1)^2/(s + 6)^2",
        "1/((s + 1)^2 (s + 2) (s + 3))",
        [[1, 6], [1, 6], [1, 1], [1, 1], [1, 2], [1, 3]],
        [[1, 1], [1, 1]],
    )
    yield case(
        "fixed resonance where the locus crosses",
        "K (s^2 + 2)/(s^2 + 2)",
        "1/(s (s + 1)(s + 2))",
        [[1, 0, 2], [1, 0], [1, 1], [1, 2]],
        [[1, 0, 2]],
        setting="6",
    )
    yield case(
        "locus through a fixed mode", "K (s + 3)/(s + 8)", "1/((s + 3)(s + 1))", [[1, 8], [1, 3], [1, 1]], [[1, 3]], setting="10"
    )
    yield case("knob in no block", "2", "1/((s + 1)(s + 3))", powers=[[[1, 4, 5]]])


def proper():
    """As many zeros as poles, or more: poles pass infinity."""
    yield plain("bi-proper, zeros on the right", [[1, 1], [1, 4]], [[1, -2], [1, -6]], setting="-1")
    yield plain("bi-proper of order one", [[1, 1]], [[1, 2]], setting="-2")
    yield plain("all-pass lag", [[1, 1]], [[-1, 1]], setting="0.5")
    yield case(
        "bi-proper, positive feedback", "K (s + 2)/(s + 1)", "(s + 5)/(s + 3)", [[1, 1], [1, 3]], [[-1], [1, 2], [1, 5]],
        feedback="positive", setting="1.5",
    )
    yield plain("two poles pass infinity at once", [[1, 2], [1, 4], [1, 9]], [[1, 3], [1, 5], [1, 7]], setting="-0.5")
    yield plain("three poles pass infinity at once", [[1, 0, 0, 1]], [[1, 0, 0, 8]], setting="-2")
    yield plain("bi-proper of order eight", [[1, k] for k in range(1, 9)], [[1, -k] for k in range(1, 9)], setting="0.1")
    yield case("more zeros than poles", "K s^2", "1/(s + 1)", [[1, 1]], [[1, 0, 0]])
    yield case("differentiator in the sensor", "K", "3/(s (s + 2))", [[1, 0], [1, 2]], [[3], [1, 1]], sensor="s + 1")


def unstable_open_loop():
    """Unstable at zero gain, with ranges bounded on both sides."""
    yield plain("two unstable poles", [[1, -1], [1, -2]], [[1, 3]], setting="5")
    yield plain("stable between two gains", [[1, -1], [1, 2], [1, 8], [1, 0]], [[1, 1], [1, 3]], setting="40")
    yield plain("two separate stable ranges", [[1, 0], [1, 4], [1, 6], [1, "1.4", 1]], [[1, 2, 4]], setting="100")
    yield plain("unstable pair, zeros near the axis", [[1, "-0.2", 4], [1, 10]], [[1, "0.3", 5]], setting="50")
    yield plain("never stable", [[1, -1], [1, -3], [1, -5]], ONE, setting="7")
    yield case(
        "amplifier", "K (0.12 s + 1)/(0.012 s + 1)", "14/((s - 3)(s + 9)(tau s + 1))",
        [["0.012", 1], [1, -3], [1, 9], ["0.008", 1]], [[7], ["0.12", 1]], sensor="0.5", setting="37",
        quantities=[("tau", "0.008")],
    )


def edges():
    """Edges that coincide, cluster or only touch."""
    tail = [1, 3, 2, 5, 1, 0]
    yield plain("touching edge", [tail], ONE, setting="2")
    for miss in ["1e-3", "-1e-3", "1e-6", "-1e-6", "1e-9", "-1e-9", "1e-12", "-1e-12", "1e-30", "1e-34", "-1e-34"]:
        off = [1, 3, 2, 5, 1 - Fraction(miss), 0]
        yield plain(f"touching edge opened by {miss}", [off], ONE, setting="2")
    yield plain("threefold contact", [[1, 4, 3, 9, 3, 7, 1, 0]], ONE, setting="1")
    yield plain("two pairs cross at once", [[1, 1, 5, 5, 3, 2]], [[1, 2]], setting="1")
    for miss in ["1e-3", "1e-6", "1e-9", "1e-13"]:
        off = Fraction(miss)
        # (s + 1)(s² + 1)(s² + miss s + 4) − (s + 2), so that the knob at one puts one pair on the axis, the other beside it.
        crowded = [1, 1 + off, 5 + off, 5 + off, 4 + off - 1, 4 - 2]
        yield plain(f"two pairs cross {miss} apart", [crowded], [[1, 2]], setting="1")
    yield plain("origin and pair at one gain", [[1, 2, 3, 6, -1]], [[1]], setting="1")
    yield plain("touches at zero gain", [[1, 0, 1], [1, 2]], [[1, 0, 4], [1, 5]], setting="1")


def large():
    """Orders 30 to 40."""
    def row(stop, start=1):
        return [[1, k] for k in range(start, stop + 1)]

    yield plain("thirty equidistant lags", row(30), ONE, setting="1e22")
    yield plain("twenty equidistant lags", row(20), ONE, setting="1e12")
    yield plain("forty lags, twenty zeros", row(40), [[1, Fraction(4 * k + 3, 2)] for k in range(20)], setting="1e20")
    modes = [[1, Fraction(k, 50), k * k] for k in range(1, 17)]
    zeros = [[1, Fraction(2 * k + 1, 100), Fraction((2 * k + 1) ** 2, 4)] for k in range(1, 16)]
    yield plain("flexible structure of order 34", modes + [[1, 0], [1, 0]], zeros + [[1, 1]], setting="12")
    yield plain("thirty equal lags", [[1, 1]] * 30, ONE, setting="0.01")
    mixed = [[1, k, 3 * k * k] for k in range(1, 16)] + [[1, Fraction(k, 4)] for k in range(1, 9)]
    yield plain("order 38, poles on both sides", mixed, [[1, -1], [1, 2, 30], [1, 6]], setting="1e15")


def wide():
    """Gains and time constants from 1e-9 to 1e9."""
    yield case(
        "time constants of all sizes", "K", "1e9/((1e-9 s + 1)(1e9 s + 1)(s + 1))", [["1e-9", 1], ["1e9", 1], [1, 1]], [["1e9"]],
        setting="1e-3",
    )
    yield case("three nanoseconds", "K", "1e-9/(1e-9 s + 1)^3", [["1e-9", 1]] * 3, [["1e-9"]], setting="1e9")
    yield case("three gigaseconds", "1e9 K", "1/(1e9 s + 1)^3", [["1e9", 1]] * 3, [["1e9"]], setting="1e-9")
    yield case(
        "six decades", "K", "1/((1e-9 s + 1)(1e-6 s + 1)(1e-3 s + 1)(s + 1)(1000 s + 1)(1e6 s + 1)(1e9 s + 1))",
        [[f"1e{e}", 1] for e in range(-9, 10, 3)], ONE, setting="500",
    )
    yield case(
        "slow zero, fast poles", "K (1e6 s + 1)", "1/(s^2 (1e-6 s + 1)(1e-7 s + 1))", [[1, 0, 0], ["1e-6", 1], ["1e-7", 1]], [["1e6", 1]],
        setting="0.1",
    )


def elsewhere():
    """Knobs that are no gain, and knobs of higher degree."""
    yield case("lag as knob", "4", "1/(s (s + 1)(K s + 1))", [[1, 1, 4]], [[1, 1, 0], [1, 0]], setting="0.2")
    yield case("damping as knob", "9", "1/(s^2 + K s + 1)", [[1, 0, 10]], [[1, 0]], setting="0.7")
    yield case(
        "natural frequency as knob", "2/(s + 3)", "K^2/(s (s^2 + 0.6 K s + K^2))",
        powers=[[[1, 3], [1, 0, 0, 0]], [["0.6"], [1, 3], [1, 0, 0]], [[1, 3, 2]]], setting="1.5",
    )
    yield case(
        "knob in controller and sensor", "K/(s + 1)", "1/((s + 2)(s + 4))", powers=[[[1, 1], [1, 2], [1, 4]], [[3]], [[1]]],
        sensor="K + 3", setting="2",
    )
    yield case("knob cubed", "K^3", "1/((s + 1)(s + 2)(s + 3))", powers=[[[1, 1], [1, 2], [1, 3]], [[0]], [[0]], [[1]]], setting="2")
    yield case("knob squared touches zero", "K^2", "1/(s (s + 2)(s + 5))", powers=[[[1, 0], [1, 2], [1, 5]], [[0]], [[1]]], setting="3")


def all_cases():
    """Every nasty case."""
    return [c for family in FAMILIES for c in family()]


FAMILIES = (even, meetings, repeated, fixed, proper, unstable_open_loop, edges, large, wide, elsewhere)
