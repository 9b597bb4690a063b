"""Values of the record's formulas: integers, names, +, −, /, ^, brackets, and products that need no sign."""

import re
from fractions import Fraction

TOKEN = re.compile(r"\s*(?:(\d+)|([A-Za-z]\w*)|(\S))")


def evaluate(text, values):
    """The value of a formula; `values` gives every name a value, exact where these are."""
    return Reader(text, values).whole()


class Reader:
    """A descent over the tokens of one formula."""

    def __init__(self, text, values):
        self.tokens = [match.groups() for match in TOKEN.finditer(text)]
        self.values = values
        self.at = 0

    def sign(self):
        """The next token where it is a sign, else None."""
        return self.tokens[self.at][2] if self.at < len(self.tokens) else None

    def take(self, sign):
        """Steps over a sign that stands there."""
        if self.sign() != sign:
            return False
        self.at += 1
        return True

    def whole(self):
        value = self.sum()
        if self.at != len(self.tokens):
            raise ValueError(f"unread: {self.tokens[self.at:]}")
        return value

    def sum(self):
        negative = self.take("-")
        value = self.product()
        value = -value if negative else value
        while self.sign() in ("+", "-"):
            value = value + self.product() if self.take("+") else value - self.product() if self.take("-") else value
        return value

    def product(self):
        value = self.power()
        while self.at < len(self.tokens):
            if self.take("/"):
                value = value / self.power()
            elif self.take("*") or self.sign() in (None, "("):
                value = value * self.power()
            else:
                break
        return value

    def power(self):
        base = self.atom()
        return base ** int(self.atom()) if self.take("^") else base

    def atom(self):
        digits, name, sign = self.tokens[self.at]
        self.at += 1
        if digits is not None:
            return Fraction(int(digits))
        if name is not None:
            return self.values[name]
        if sign != "(":
            raise ValueError(f"unexpected {sign}")
        value = self.sum()
        if not self.take(")"):
            raise ValueError("a bracket is open")
        return value
