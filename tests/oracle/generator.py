"""Seeded random loops of order 2 to 20, in every shape a loop is typed in.

A factor carries its text and its value, made from the same numbers; the text is what Stayband reads, the value what the oracle
computes with. Real and complex poles and zeros on both sides of the axis and on it, integrators, repeated and cancelled factors,
bi-proper and non-minimum-phase loops, positive feedback, names for numbers, and the knob at other places than the gain.
"""

from dataclasses import dataclass
from fractions import Fraction
from random import Random

from cases import Case, decimal_text, project
from polynomials import Characteristic, Knobbed, Ratio, knob, laplace, number, polynomial, rational

#: Lowest and highest order of a random loop.
ORDERS = (2, 20)
#: A knob that enters quadratically is tried up to this order only: the oracle's eliminants grow with its square.
QUADRATIC_ORDER = 7


@dataclass
class Factor:
    """A text and its value."""

    text: str
    value: Ratio
    degree: int


class Writer:
    """Draws factors; some numbers become named quantities."""

    def __init__(self, rng):
        self.rng = rng
        self.scale = Fraction(10) ** rng.choice([-3, -2, -1, 0, 0, 0, 0, 1, 2, 3])
        self.quantities = []
        self.naming = True

    def size(self):
        """A positive decimal of one to three digits around the loop's scale."""
        digits = self.rng.choice([1, 2, 2, 3])
        value = Fraction(self.rng.randint(1, 10**digits - 1), 10 ** (digits - 1))
        return value * self.scale * Fraction(10) ** self.rng.choice([-1, 0, 0, 0, 0, 1])

    def time(self):
        """A positive decimal around the loop's time scale."""
        return Fraction(self.rng.randint(1, 99), 20) / self.scale

    def write(self, value):
        """The text of a positive decimal: digits, or now and then the name of a quantity."""
        if self.naming and len(self.quantities) < 4 and self.rng.random() < 0.06:
            symbol = ["tau", "a_1", "b", "m"][len(self.quantities)]
            self.quantities.append((symbol, decimal_text(value)))
            return symbol
        return decimal_text(value)

    def sign(self, right):
        return -1 if right else 1

    def linear(self, right):
        """One real root."""
        plus = "-" if right else "+"
        style = self.rng.random()
        if style < 0.6:
            a = self.size()
            return Factor(f"(s {plus} {self.write(a)})", poly(self.sign(right) * a, 1), 1)
        t = self.time()
        if right and style < 0.8:
            return Factor(f"(1 - {self.write(t)} s)", poly(1, -t), 1)
        return Factor(f"({self.write(t)} s {plus} 1)", poly(self.sign(right), t), 1)

    def pair(self, right):
        """Two complex or real roots from a quadratic factor."""
        w = self.size()
        square = rounded(w * w)
        damping = rounded(w * Fraction(self.rng.choice([1, 4, 10, 20, 60, 120, 180]), 100))
        if self.rng.random() < 0.06:
            return Factor(f"(s^2 + {self.write(square)})", poly(square, 0, 1), 2)
        plus = "-" if right else "+"
        two = self.rng.choice(["^2", "²"])
        text = f"(s{two} {plus} {self.write(damping)} s + {self.write(square)})"
        return Factor(text, poly(square, self.sign(right) * damping, 1), 2)

    def expanded(self):
        """Three roots multiplied out."""
        self.naming = False
        a, b = self.linear(False), self.pair(self.rng.random() < 0.15)
        self.naming = True
        product = (a.value * b.value).numerator.powers[0]
        coefficients = [Fraction(int(c.p), int(c.q)) for c in product.coeffs()]
        return Factor(f"({sum_text(coefficients)})", a.value * b.value, 3)

    def integrator(self):
        return Factor("s", laplace(), 1)

    def factors(self, degree, right=0.2, integrators=0.15):
        """Factors with this total degree."""
        found = []
        while (left := degree - sum(f.degree for f in found)) > 0:
            draw, in_right = self.rng.random(), self.rng.random() < right
            if draw < integrators and sum(f.text[0] == "s" for f in found) < 2:
                found.append(self.integrator())
            elif left >= 3 and draw > 0.93:
                found.append(self.expanded())
            elif left >= 2 and draw > 0.55:
                found.append(self.pair(in_right))
            else:
                found.append(self.linear(in_right))
            last = found[-1]
            while self.rng.random() < 0.07 and last.text[0] == "(" and left >= 2 * last.degree:
                left -= last.degree
                found.append(last)
        return found


def poly(*coefficients):
    """A polynomial in s, lowest power first."""
    return Ratio(polynomial(*coefficients))


def rounded(value):
    """Three significant decimal digits."""
    return Fraction(f"{float(value):.2e}")


def sum_text(coefficients):
    """A polynomial in s as typed, highest power first."""
    terms = []
    for power in range(len(coefficients) - 1, -1, -1):
        c = coefficients[power]
        if c == 0:
            continue
        variable = ["", "s"][power] if power < 2 else f"s^{power}"
        size = "" if abs(c) == 1 and power else decimal_text(abs(c))
        sign = "-" if c < 0 else "+"
        lead = ("-" if c < 0 else "") if not terms else f" {sign} "
        terms.append(lead + f"{size} {variable}".strip())
    return "".join(terms)


def quotient(rng, gain, above, below):
    """A block's text and value from a gain factor and lists of factors."""
    joint = rng.choice([" ", " ", "·", " * "])
    value = gain.value
    for f in above:
        value = value * f.value
    for f in below:
        value = value / f.value
    top = joint.join([gain.text] * (gain.text != "1" or not above) + powers(above))
    if not below:
        return Factor(top, value, 0)
    bottom = joint.join(powers(below))
    if len(below) > 1 or bottom[0] != "(" or bottom[-1] != ")":
        bottom = f"({bottom})"
    return Factor(f"{top}/{bottom}", value, 0)


def powers(factors):
    """Texts, equal neighbours written as a power."""
    texts = []
    for i, f in enumerate(factors):
        if i and factors[i - 1] is f:
            base, count = texts[-1]
            texts[-1] = (base, count + 1)
        else:
            texts.append((f.text, 1))
    return [base if count == 1 else f"{base}^{count}" for base, count in texts]


def constant(writer):
    """A positive number as a factor."""
    value = writer.size() / writer.scale
    return Factor(writer.write(value), number(value), 0)


ONE = Factor("1", number(1), 0)


def knob_as_gain(writer, order):
    """The plain case: a gain in the controller or the sensor."""
    rng = writer.rng
    zeros = rng.randint(0, order - 1) if rng.random() > 0.12 else order
    below, above = writer.factors(order), writer.factors(zeros, right=0.25, integrators=0.05)
    k = Factor("K", knob(), 0)
    split, cut = rng.randint(0, len(below)), rng.randint(0, len(above))
    if rng.random() < 0.07 and split and cut < len(above):
        above[-1] = below[0] if below[0].degree == above[-1].degree else above[-1]  # A cancelled factor.
    controller = quotient(rng, k, above[:cut], below[:split])
    plant = quotient(rng, constant(writer), above[cut:], below[split:])
    sensor = quotient(rng, constant(writer), [], []) if rng.random() < 0.2 else ONE
    if rng.random() < 0.08:
        return ONE, plant, Factor(controller.text, controller.value, 0)
    return controller, plant, sensor


def knob_in_three_terms(writer, order):
    """One gain of a controller of proportional, integral and derivative action."""
    rng = writer.rng
    p, i, d = (writer.size() / writer.scale for _ in range(3))
    s, lag = laplace(), writer.time() / 10
    texts = [writer.write(p), f"{writer.write(i)}/s", f"{writer.write(d)} s/({writer.write(lag)} s + 1)"]
    values = [number(p), number(i) / s, number(d) * s / poly(1, lag)]
    place = rng.randrange(3)
    texts[place] = ["K", "K/s", f"K s/({decimal_text(lag)} s + 1)"][place]
    values[place] = [knob(), knob() / s, knob() * s / poly(1, lag)][place]
    controller = Factor(" + ".join(texts), values[0] + values[1] + values[2], 0)
    rest = max(order - 2, 1)
    plant = quotient(rng, constant(writer), writer.factors(rng.randint(0, rest - 1), 0.2, 0), writer.factors(rest, 0.1, 0.05))
    return controller, plant, ONE


def knob_as_time(writer, order):
    """The time constant of a lag, or of a lead."""
    rng = writer.rng
    part = Factor("(K s + 1)", Ratio(Knobbed([[1], [0, 1]])), 1)
    below = writer.factors(order - 1)
    above = writer.factors(rng.randint(0, order - 2) if order > 2 else 0, 0.2, 0.05)
    if rng.random() < 0.5:
        return quotient(rng, constant(writer), [], []), quotient(rng, constant(writer), above, below + [part]), ONE
    extra = writer.factors(1, 0, 0)
    return quotient(rng, constant(writer), [part], []), quotient(rng, constant(writer), above[: max(0, len(above) - 1)], below + extra), ONE


def knob_as_coefficient(writer, order):
    """A damping coefficient or a spring rate inside a quadratic factor."""
    rng = writer.rng
    c = writer.size()
    if rng.random() < 0.5:
        part = Factor(f"(s^2 + K s + {writer.write(c)})", Ratio(Knobbed([[rational(c), 0, 1], [0, 1]])), 2)
    else:
        part = Factor(f"(s^2 + {writer.write(c)} s + K)", Ratio(Knobbed([[0, rational(c), 1], [1]])), 2)
    below = writer.factors(max(order - 2, 0))
    above = writer.factors(rng.randint(0, max(order - 2, 0)), 0.2, 0.05)
    return quotient(rng, constant(writer), [], []), quotient(rng, constant(writer), above, below + [part]), ONE


def knob_as_frequency(writer, order):
    """The natural frequency of a second-order block: quadratic in the knob."""
    rng = writer.rng
    twice = Fraction(rng.randint(1, 19), 10)
    below_text = f"(s^2 + {decimal_text(twice)} K s + K^2)"
    part = Factor(below_text, Ratio(Knobbed([[0, 0, 1], [0, rational(twice)], [1]])), 2)
    order = min(order, QUADRATIC_ORDER)
    below = writer.factors(max(order - 2, 0))
    above = writer.factors(rng.randint(0, max(order - 2, 0)), 0.2, 0)
    top = Factor("K^2", knob() * knob(), 0) if rng.random() < 0.7 else constant(writer)
    return quotient(rng, constant(writer), [], []), quotient(rng, top, above, below + [part]), ONE


SHAPES = [
    (knob_as_gain, 70),
    (knob_in_three_terms, 9),
    (knob_as_time, 9),
    (knob_as_coefficient, 7),
    (knob_as_frequency, 5),
]


def random_case(seed):
    """The random loop of this seed."""
    rng = Random(f"stayband oracle {seed}")
    writer = Writer(rng)
    order = ORDERS[0] + seed % (ORDERS[1] - ORDERS[0] + 1)
    shape = rng.choices([f for f, _ in SHAPES], [w for _, w in SHAPES])[0]
    controller, plant, sensor = shape(writer, order)
    positive = rng.random() < 0.12
    setting = Fraction(rng.randint(-200, 999), 100) * Fraction(10) ** rng.choice([-1, 0, 0, 1])
    document = project(
        f"random {seed}",
        controller.text,
        plant.text,
        sensor.text,
        "positive" if positive else "negative",
        setting=decimal_text(setting),
        quantities=writer.quantities,
    )
    loop = Characteristic.closed(controller.value, plant.value, sensor.value, positive)
    return Case(str(seed), document, loop, setting)
