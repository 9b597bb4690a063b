"""One case of the oracle: a project as Stayband reads it, and beside it the same loop as exact coefficients."""

import json
from dataclasses import dataclass
from decimal import Context, Decimal
from fractions import Fraction

from polynomials import Characteristic

#: Digits of the longest number a case is typed with.
MOST_DIGITS = 60


@dataclass
class Case:
    """`name` repeats the case with `--only`."""

    name: str
    project: dict
    loop: Characteristic
    setting: Fraction

    @property
    def text(self):
        """The project as one line of JSON."""
        return json.dumps(self.project, ensure_ascii=False)


def project(name, controller, plant, sensor="1", feedback="negative", knob="K", setting="1", quantities=()):
    """A project document; `quantities` are pairs (symbol, value)."""
    return {
        "format": "stayband-project/1",
        "title": name,
        "loop": {"controller": controller, "plant": plant, "sensor": sensor, "feedback": feedback},
        "quantities": [{"symbol": symbol, "value": value} for symbol, value in quantities],
        "knob": knob,
        "setting": {"value": setting},
    }


def decimal_text(value):
    """A finite decimal as typed: plain where it is short, with an exponent else."""
    fraction = Fraction(value)
    digits = Context(prec=MOST_DIGITS)
    plain = digits.divide(Decimal(fraction.numerator), Decimal(fraction.denominator))
    if Fraction(plain) != fraction:
        raise ValueError(f"{fraction} is no decimal of {MOST_DIGITS} digits")
    plain = digits.normalize(plain)
    digits, exponent = len(plain.as_tuple().digits), plain.as_tuple().exponent
    if exponent > 4 or digits + exponent < -4:
        return str(plain).replace("E+", "e").replace("E", "e")
    return format(plain, "f")
