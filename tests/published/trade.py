"""Facts every practitioner knows, as checks on scenarios of our own. Common practice, no source."""

from fractions import Fraction

#: Where each of these facts comes from.
SOURCE = "common practice, no source"


def project(controller, plant, setting):
    """A project of our own, with unity feedback."""
    return {
        "format": "stayband-project/1",
        "title": SOURCE,
        "loop": {"controller": controller, "plant": plant, "sensor": "1", "feedback": "negative"},
        "quantities": [],
        "knob": "K",
        "setting": {"value": setting},
    }


def three_more_poles(ask, report):
    """Three more poles than zeros send the asymptotes to ±60° and 180°."""
    record = ask(project("K (s + 3)", "1/((s + 1)(s + 2)(s + 4)(s + 7))", "1"))
    report.equal("asymptotes at ±60° and 180°", [-60, 60, 180], record["asymptotes"]["positive"]["angles"])


def left_of_an_odd_number(ask, report):
    """The real axis belongs to the locus left of an odd number of poles and zeros."""
    poles, zeros = [0, -2, -3, -8], [-5]
    record = ask(project("K (s + 5)", "1/(s (s + 2)(s + 3)(s + 8))", "1"))
    for twice in range(-25, 9, 2):
        s = twice / 2 - 0.25
        odd = sum(p > s for p in poles + zeros) % 2 == 1
        for half, expected in (("positive", odd), ("negative", not odd)):
            found = any(
                (low is None or low < s) and (high is None or s < high) for low, high in record["realAxis"][half]
            )
            report.equal(f"real axis at {s}, {half} gain", expected, found)


def zero_row(ask, report):
    """A row of zeros in the Routh array means roots on the axis; none at the gains beside it."""
    for gain in (5, 6, 7):
        record = ask(project("K", "1/(s^3 + 2 s^2 + 3 s)", str(gain)))
        third = Fraction(2 * 3 - 1 * gain, 2)  # The s¹ row of s³ + 2s² + 3s + gain.
        report.equal(f"roots on the axis at gain {gain}", third == 0, record["closedLoop"]["axisPoles"] > 0)
        report.equal(f"unstable at gain {gain}", third < 0, record["closedLoop"]["unstablePoles"] > 0)


def breakaway_gain(ask, report):
    """At the breakaway gain the response turns from overdamped to underdamped."""
    record = ask(project("K", "1/((s + 1)(s + 5))", "4"))
    gain = next(mark["knob"] for mark in record["landmarks"] if mark["kind"] == "breakaway")
    report.equal("breakaway gain", 4, gain)
    before = next(r for r in record["character"] if r["to"] and r["to"]["value"] == gain)
    after = next(r for r in record["character"] if r["from"] and r["from"]["value"] == gain)
    report.equal("before, at and after", ("overdamped", "critically damped", "underdamped"), (before["name"], before["to"]["name"], after["name"]))
    report.equal("at the setting", "critically damped", record["closedLoop"]["name"])


FACTS = {f.__name__: f for f in (three_more_poles, left_of_an_odd_number, zero_row, breakaway_gain)}
