"""Knob values and settings: samples of the stable ranges, and the controller's scale."""

import math
from fractions import Fraction

#: Samples of a stable range.
SAMPLES = 60
#: Natural logarithm of how near to a range's ends, relative to the range, the samples come.
NEAREST = math.log(1e3)
#: Beyond this factor of its finite end an endless range is not sampled.
FAR = math.log(1e4)


def sampled_knobs(record):
    """Values in every stable range, crowded towards its ends, and one in every other range."""
    found = []
    for r in record["stability"]:
        low, high = (r[end] and r[end]["value"] for end in ("from", "to"))
        found += spread(low, high, SAMPLES if r["stable"] else 1)
    return found


def spread(low, high, count):
    """Evenly spaced on the logarithm of the distances to both ends."""
    steps = [(2 * k + 1) / count - 1 for k in range(count)]
    if low is not None and high is not None:
        parts = [math.exp(NEAREST * x) for x in steps]
        return [low + (high - low) * p / (1 + p) for p in parts]
    if low is None and high is None:
        return [math.sinh(FAR * x) for x in steps]
    end, sign = (low, 1) if high is None else (high, -1)
    unit = abs(end) or 1.0
    return [end + sign * unit * math.exp(FAR * x) for x in steps]


def factor_of(project):
    """The factor of a project's scale: a number, or a product of its quantities."""
    text = project["setting"].get("factor", "")
    sign, names = (-1, text[1:]) if text.startswith("-") else (1, text)
    values = {q["symbol"]: Fraction(q["value"]) for q in project["quantities"]}
    return sign * math.prod((values[word] if word in values else Fraction(word) for word in names.split()), start=Fraction(1))


def scale_setting(project, knob):
    """The setting for a knob; None where it would not be above zero on a reciprocal scale."""
    if project["setting"].get("direction") == "reciprocal":
        setting = factor_of(project) / knob if knob else None
        return setting if setting is not None and setting > 0 else None
    return knob / factor_of(project)


def scale_knob(project, setting):
    """The knob at a setting; None for setting 0 on a reciprocal scale."""
    if project["setting"].get("direction") == "reciprocal":
        return factor_of(project) / setting if setting else None
    return setting * factor_of(project)
