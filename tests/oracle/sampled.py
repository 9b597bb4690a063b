"""Random sampled loops: every edge confirmed on both sides by certified counts, and no edge missed between.

    sampled.py --binary target/release/records            200 seeds
    sampled.py --binary ... --only 17                     the loop of seed 17
"""

import argparse
import json
import random
import sys
import time
from dataclasses import dataclass, field, replace
from fractions import Fraction
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))

from binary import NoAnswer, Records
from sampled_answers import check_answers, check_margins, check_period
from sampled_truth import Truth, product

SEEDS = 200
#: Beside an edge the counts are looked at this far away, as a part of its value, or halfway to its neighbour.
BESIDE = Fraction(1, 10**8)
#: Changed loops in the self-test.
TAMPERED = 10
#: Loops of which something could not be computed (a half of the locus, a contact), as a part of all.
UNDRAWN = 0.03
#: Random knob values looked at in every range.
LOOKS = 6
METHODS = ["tustin", "tustin-prewarped", "backward-difference", "matched", "in z"]


@dataclass
class Case:
    """A random loop; coefficients lowest power first."""

    plant_above: list
    plant_below: list
    controller_above: list
    controller_below: list
    method: str
    period: Fraction
    delay: Fraction
    computation: Fraction
    dead_time: Fraction
    prewarp: Fraction = None
    #: A part of the controller beside the one with the knob: numerator and denominator.
    fixed_above: tuple = None
    sensor: list = field(default_factory=lambda: [Fraction(1)])

    def at_period(self, period):
        """The same loop with another sample period."""
        return replace(self, period=period, delay=self.computation * period + self.dead_time)

    def project(self, setting=None):
        """The project document; the setting is the knob."""
        variable = "z" if self.method == "in z" else "s"
        text = f"K ({written(self.controller_above, variable)})/({written(self.controller_below, variable)})"
        if self.fixed_above is not None:
            text += f" + ({written(self.fixed_above[0], variable)})/({written(self.fixed_above[1], variable)})"
        sampling = {"period": decimal(self.period), "delay": decimal(self.computation)}
        if self.method != "in z":
            sampling["method"] = self.method
        if self.prewarp is not None:
            sampling["prewarp"] = decimal(self.prewarp)
        loop = {
            "controller": text,
            "plant": f"({written(self.plant_above, 's')})/({written(self.plant_below, 's')})",
            "deadTime": decimal(self.dead_time),
            "sampling": sampling,
        }
        document = {"format": "stayband-project/1", "loop": loop, "knob": "K"}
        if setting is not None:
            document["setting"] = {"value": decimal(setting)}
        return json.dumps(document)


def decimal(value):
    """A fraction whose denominator divides a power of ten."""
    value = Fraction(value)
    digits = 0
    while (value * 10**digits).denominator != 1:
        digits += 1
        assert digits < 40, value
    whole = abs(int(value * 10**digits))
    text = str(whole).rjust(digits + 1, "0")
    text = text if digits == 0 else f"{text[:-digits]}.{text[-digits:]}"
    return ("-" if value < 0 else "") + text


def written(coefficients, variable):
    """The polynomial as text."""
    return " + ".join(f"({decimal(c)}) {variable}^{i}" if i else f"({decimal(c)})" for i, c in enumerate(coefficients))


def short(rng, low, high):
    """A random number of two digits, log-uniform."""
    value = low * (high / low) ** rng.random()
    exponent = 0
    while value < 10:
        value, exponent = value * 10, exponent - 1
    while value >= 100:
        value, exponent = value / 10, exponent + 1
    return Fraction(round(value)) * Fraction(10) ** exponent


def random_plant(rng):
    """Numerator and denominator of order 1 to 6, and about the fastest pole."""
    below, order, wanted, fastest = [Fraction(1)], 0, rng.randint(1, 6), 1.0
    while order < wanted:
        kind = rng.random()
        size = short(rng, 0.2, 30)
        fastest = max(fastest, float(size))
        if kind < 0.12:
            factor = [0, 1]
        elif kind < 0.2:
            factor = [-size / 10, 1]
        elif kind < 0.6 or order + 2 > wanted:
            factor = [size, 1]
        else:
            damping = rng.choice([Fraction(1, 50), Fraction(1, 5), Fraction(1, 2), Fraction(4, 5), Fraction(0)])
            damping = damping if damping or rng.random() < 0.3 else Fraction(1, 10)
            factor = [size * size, 2 * damping * size, 1]
        below, order = product(below, factor), order + len(factor) - 1
    above = [short(rng, 0.5, 50)]
    zeros = rng.randint(0, order if rng.random() < 0.15 else order - 1)
    for _ in range(min(zeros, 2)):
        root = short(rng, 0.3, 40) * rng.choice([1, 1, 1, -1])
        above = product(above, [root, 1])
    return above, below, fastest


def random_controller(rng, method):
    """Numerator and denominator."""
    kind = rng.randrange(4)
    if method == "in z":
        a, b = Fraction(rng.randint(-9, 9), 10), Fraction(rng.randint(-9, 9), 10)
        return [([1], [1]), ([-a, 1], [-b, 1]), ([0, 1], [-1, 1]), ([a * b, -a - b, 1], [0, -1, 1])][kind]
    a, b = short(rng, 0.3, 10), short(rng, 5, 60)
    return [([1], [1]), ([a, 1], [b, 1]), ([a, 1], [0, 1]), (product([a, 1], [2 * a, 1]), product([0, 1], [b, 1]))][kind]


def random_case(seed):
    """The loop of a seed."""
    rng = random.Random(f"sampled {seed}")
    above, below, fastest = random_plant(rng)
    method = METHODS[seed % len(METHODS)]
    up, down = random_controller(rng, method)
    period = short(rng, 0.02 / fastest, 3 / fastest)
    computation = rng.choice([Fraction(0), Fraction(0), Fraction(1, 2), Fraction(1), Fraction(3, 2), Fraction(23, 10), Fraction(3)])
    dead_time = rng.choice([Fraction(0), Fraction(0), short(rng, 0.1, 5) * period])
    if seed % 20 == 7:
        # Many periods of dead time: counted by crossings.
        dead_time = short(rng, 8, 20) * period
    prewarp = Fraction(round(float(1 / period))) if method == "tustin-prewarped" else None
    if prewarp is not None and prewarp == 0:
        prewarp = Fraction(1, 10) / Fraction(round(float(period) + 1))
        prewarp = Fraction(round(float(prewarp) * 10**6), 10**6)
    fixed = None
    if method not in ("matched",) and rng.random() < 0.25:
        fixed = ([short(rng, 0.1, 1)], [1]) if method == "in z" else ([short(rng, 0.1, 1)], [short(rng, 1, 9), 1])
    delay = computation * period + dead_time
    return Case(above, below, up, down, method, period, delay, computation, dead_time, prewarp, fixed)


def solved(records, case, setting=None):
    """The record, or the problems."""
    answer = records.ask(case.project(setting))["answer"]
    return answer["record"], answer["problems"]


def check(case, record):
    """What is wrong with the ranges of a record, and how many facts were checked."""
    truth = Truth(case)
    ranges = record["stability"]
    edges = [(Fraction(r["to"]["bracket"][0]), Fraction(r["to"]["bracket"][1])) for r in ranges[:-1]]
    faults, checked = [], 0

    def expect(q, k, why):
        nonlocal checked
        found = truth.outside(q)
        checked += 1
        if found != ranges[k]["unstablePoles"]:
            faults.append(f"{why}: at {float(q)!r} {found} poles outside, not {ranges[k]['unstablePoles']}")

    for i, (low, high) in enumerate(edges):
        size = max(abs(low), abs(high), Fraction(1, 10**9))
        below = low - size * BESIDE
        above = high + size * BESIDE
        if i and edges[i - 1][1] >= below:
            below = (edges[i - 1][1] + low) / 2
        if i + 1 < len(edges) and edges[i + 1][0] <= above:
            above = (edges[i + 1][0] + high) / 2
        expect(below, i, f"below edge {i}")
        expect(above, i + 1, f"above edge {i}")
    rng = random.Random(1)
    for k in range(len(ranges)):
        for _ in range(LOOKS):
            expect(inside(edges, k, rng), k, f"in range {k}")
    return faults, checked


def inside(edges, k, rng):
    """A random knob value in range k, spread over decades."""
    part = Fraction(rng.random()).limit_denominator(10**6)
    low = edges[k - 1][1] if k else None
    high = edges[k][0] if k < len(edges) else None
    if low is None and high is None:
        return (part - Fraction(1, 2)) * 10 ** rng.randint(0, 6)
    if low is None:
        return high - max(abs(high), 1) * part * Fraction(10) ** rng.randint(-2, 6)
    if high is None:
        return low + max(abs(low), 1) * part * Fraction(10) ** rng.randint(-2, 6)
    if low > 0 and high / low > 100:
        return low * Fraction((float(high / low)) ** float(part)).limit_denominator(10**9) if high / low < 10**300 else low * 2
    if high < 0 and low / high > 100:
        return high * Fraction((float(low / high)) ** float(part)).limit_denominator(10**9)
    return low + (high - low) * (part * Fraction(98, 100) + Fraction(1, 100))


def stable_setting(answer):
    """A short knob value inside of the first stable range that has one, or None."""
    for r in answer.get("stability", []):
        if not r["stable"]:
            continue
        low, high = (r[end] and r[end]["value"] for end in ("from", "to"))
        if low is None and high is None:
            return Fraction(1)
        low = low if low is not None else high - max(abs(high), 1)
        high = high if high is not None else low + max(abs(low), 1)
        middle = low + 0.4 * (high - low)
        digits = 2
        while digits < 16:
            value = Fraction(f"{middle:.{digits}g}") if middle else Fraction(0)
            if value and low < value < high and abs(float(value) - middle) < 0.2 * (high - low):
                return value
            digits += 1
    return None


def check_setting(case, records, record):
    """What is wrong with what is told at a setting, how many facts were checked, and the record there."""
    knob = stable_setting(record)
    if knob is None:
        return [], 0, None
    told, problems = solved(records, case, knob)
    if told is None:
        return [f"with the setting {float(knob)!r}: {problems}"], 0, None
    faults, checked = [], 1
    if told["closedLoop"]["unstablePoles"] or told["closedLoop"]["axisPoles"]:
        faults.append(f"not stable at {float(knob)!r}")
    parts = [check_answers(case, knob, told), check_margins(case, knob, told)]
    parts.append(check_period(case, knob, told["timing"]["sampling"]["longestPeriod"]))
    for found, count in parts:
        faults, checked = faults + found, checked + count
    return faults, checked, told


def self_test(records):
    """Shows that the checks can fail: a loop whose delay is a millionth of a period longer must not pass."""
    unseen = []
    for seed in range(TAMPERED):
        case = random_case(seed)
        record, _ = solved(records, case)
        other = replace(case, delay=case.delay + case.period / 10**6)
        if record is None or not check(other, record)[0]:
            unseen.append(seed)
    print(f"{TAMPERED - len(unseen)} of {TAMPERED} changed loops recognised")
    return not unseen


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("--binary", required=True)
    parser.add_argument("--only", type=int)
    parser.add_argument("--seeds", type=int, default=SEEDS)
    arguments = parser.parse_args()
    records = Records(arguments.binary)
    if not self_test(records):
        return 1
    passed = failed = edges = answered = limited = undrawn = 0
    slowest = (0, None)
    for seed in [arguments.only] if arguments.only is not None else range(arguments.seeds):
        case = random_case(seed)
        faults, checked = [], 0
        try:
            started = time.monotonic()
            record, problems = solved(records, case)
            slowest = max(slowest, (time.monotonic() - started, seed))
            if record is None:
                faults.append(f"no record: {problems}")
            else:
                faults, checked = check(case, record)
                more, count, told = check_setting(case, records, record)
                faults, checked = faults + more, checked + count
                edges += len(record["stability"]) - 1
                undrawn += any("could not be" in notice["text"] for notice in record["notices"])
                if told is not None:
                    answered += told["step"] is not None
                    limited += told["timing"]["sampling"]["longestPeriod"] is not None
        except NoAnswer as reason:
            faults.append(str(reason))
        passed, failed = passed + checked - len(faults), failed + len(faults)
        if faults:
            print(f"seed {seed}: {case.project()}")
            for fault in faults[:4]:
                print(f"    {fault}")
            sys.stdout.flush()
    print(f"{edges} edges, {answered} answers, {limited} longest periods; {undrawn} loops with something not computed")
    print(f"slowest record {1e3 * slowest[0]:.0f} ms (seed {slowest[1]})")
    if undrawn > UNDRAWN * max(arguments.seeds, 100):
        failed += 1
        print("too many loops with something not computed")
    print(f"{passed} passed, {failed} failed")
    return 1 if failed or not passed else 0


if __name__ == "__main__":
    sys.exit(main())
