"""Loops with dead time against counting by contour: every edge on both sides, and none missed.

The count of zeros of F = A + B·e^(−sT) right of the axis is the winding of F over the closed right half plane. It is
counted here along s = jω with steps of at most 0.02 in ωT and short beside the distance to every root of A: a coarser
step aliases. Beyond all roots of A, and where |B| is a third of |A|, F turns no more than the arc of A's leading power
says, give or take less than half a turn.

Run: python tests/oracle/dead_time.py PROGRAM [--loops 200] [--seed 1]
"""

import argparse
import json
import subprocess
import sys
from fractions import Fraction

import numpy as np

# Winding is refused where a step turns F by more than this: radians.
LARGEST_TURN = 1.0
# Relative distance from an edge at which both sides are counted.
BESIDE = 1e-4
# Points of a contour beyond which a count is left out as unclear.
POINTS_CAP = 1_500_000
# Points of the knob between edges that are counted besides.
SAMPLES = 3


def value(coefficients, s):
    """p(s), lowest power first."""
    return np.polynomial.polynomial.polyval(s, np.array(coefficients, dtype=float))


def squared(coefficients):
    """|p(jω)|² as a polynomial in ω², lowest power first."""
    p = np.array(coefficients, dtype=float)
    turned = p * np.array([1, 1j, -1, -1j])[np.arange(len(p)) % 4]
    product = np.polynomial.polynomial.polymul(turned, turned.conj())
    return product.real[::2]


def contour_frequencies(a, b, dead_time):
    """Frequencies from 0 to where A outweighs B three times for good, fine beside every root of A and in ωT."""
    roots = np.polynomial.polynomial.polyroots(np.array(a, dtype=float))
    top = 10.0 * max(1e-3, np.abs(roots).max(initial=0))
    # Where |A| = 3·|B|, squared: beyond the last such frequency A outweighs B for good.
    weight = np.polynomial.polynomial.polysub(squared(a), 9 * squared(b))
    even = np.polynomial.polynomial.polyroots(weight)
    top = max(top, 1.1 * np.sqrt(np.abs(even)).max(initial=0))
    while top * dead_time < 1:
        top *= 1.5
    if top * dead_time / 0.02 > POINTS_CAP:
        return None
    pieces = [np.arange(0, top, 0.02 / dead_time), np.geomspace(1e-9 * top, top, 4000)]
    for root in roots:
        width = max(abs(root.real), 1e-7 * abs(root), 1e-12)
        offsets = width * np.concatenate([np.linspace(-8, 8, 801), np.geomspace(8, 1e6, 800), -np.geomspace(8, 1e6, 800)])
        pieces.append(np.clip(abs(root.imag) + offsets, 0, top))
    return np.unique(np.concatenate(pieces))


def unstable(a, b, dead_time):
    """Zeros right of the axis, or None where the winding is not clear."""
    frequencies = contour_frequencies(a, b, dead_time)
    if frequencies is None:
        return None
    for _ in range(12):
        s = 1j * frequencies
        f = value(a, s) + value(b, s) * np.exp(-s * dead_time)
        turns = np.angle(f[1:] * f[:-1].conj())
        coarse = np.abs(turns) > 0.3
        if not coarse.any():
            break
        middle = 0.5 * (frequencies[1:] + frequencies[:-1])[coarse]
        frequencies = np.sort(np.concatenate([frequencies, middle]))
    if np.abs(turns).max() > LARGEST_TURN:
        return None
    # Up the upper half of the axis; the arc of F ≈ A turns by n·π/2 back to the real axis, but for the last argument's own
    # distance from it.
    degree = len(a) - 1
    last = np.angle(f[-1] / (a[-1] * (1j) ** degree))
    count = (degree * np.pi / 2 - (turns.sum() - last)) / np.pi
    # F at 0 is real: from there the argument counts.
    return int(round(count)) if abs(count - round(count)) < 0.05 else None


def random_polynomial(rng, degree, unstable_share):
    """A product of real and complex factors with short integer coefficients."""
    p = np.array([Fraction(1)])
    while degree > 0:
        size = Fraction(int(rng.integers(1, 40)), 10)
        if degree >= 2 and rng.random() < 0.5:
            damping = Fraction(int(rng.integers(1, 20)), 10) * (-1 if rng.random() < unstable_share else 1)
            factor = np.array([size * size, damping * size, Fraction(1)])
            degree -= 2
        else:
            sign = -1 if rng.random() < unstable_share else 1
            zero = rng.random() < 0.15
            factor = np.array([Fraction(0) if zero else size * sign, Fraction(1)])
            degree -= 1
        p = np.convolve(p, factor)
    common = np.lcm.reduce([c.denominator for c in p])
    return [int(c * common) for c in p]


def random_loop(rng):
    """A task for the program: a gain loop, half of them with a fixed delayed part beside the knob."""
    order = int(rng.integers(1, 7))
    a = random_polynomial(rng, order, 0.12)
    b1 = random_polynomial(rng, int(rng.integers(0, order)), 0.25)
    b0 = []
    if order > 1 and rng.random() < 0.4:
        scale = int(rng.integers(1, 30))
        b0 = [scale * c * int(rng.choice([-1, 1])) for c in random_polynomial(rng, int(rng.integers(0, order)), 0.25)]
    return {"a": a, "b0": b0, "b1": b1, "deadTime": [int(rng.integers(1, 40)), 10]}


def padded(p, length):
    return np.array(list(p) + [0] * (length - len(p)), dtype=float)


def check_gain(task, answer):
    """Complaints about one gain loop, and the number of edges confirmed."""
    a, dead_time = task["a"], task["deadTime"][0] / task["deadTime"][1]
    length = max(len(task["b0"]), len(task["b1"]))
    b = lambda q: padded(task["b0"], length) + q * padded(task["b1"], length)
    return check_ranges(answer, lambda q: unstable(a, b(q), dead_time))


def check_delay(task, answer):
    """Complaints about one loop with the dead time as the knob."""
    return check_ranges(answer, lambda time: unstable(task["d"], padded(task["n"], len(task["n"])), time), lowest=1e-3)


def check_ranges(answer, count, lowest=None):
    complaints, confirmed, unclear = [], 0, 0
    ranges = answer["stability"]
    edges = [r["to"] for r in ranges[:-1]]
    values = [e["value"] for e in edges]
    for index, (edge, before, after) in enumerate(zip(edges, ranges, ranges[1:])):
        value_here = edge["value"]
        width = float(Fraction(edge["bracket"][1]) - Fraction(edge["bracket"][0]))
        if width > 1e-15 * abs(value_here):
            complaints.append(f"edge {value_here}: bracket {width} wide")
        gap = min([abs(value_here - v) for v in values if v != value_here], default=abs(value_here) or 1.0)
        step = min(BESIDE * (abs(value_here) or 1.0), 0.3 * gap)
        for side, expected in ((value_here - step, before), (value_here + step, after)):
            if lowest is not None and side <= 0:
                continue
            found = count(side)
            if found is None:
                unclear += 1
            elif found != expected["unstablePoles"]:
                complaints.append(f"beside edge {value_here} ({side}): counted {found}, said {expected['unstablePoles']}")
        confirmed += 1
    start = lowest if lowest is not None else (min(values) * 2 - 1 if values else -1.0)
    ends = [start] + values + [(max(values) if values else 1.0) * 1.01]
    for (low, high), said in zip(zip(ends, ends[1:]), ranges):
        if high <= low:
            continue
        for part in np.linspace(0.1, 0.9, SAMPLES):
            q = low + part * (high - low)
            if (q < values[0] * 1.01 if values and lowest is None and answer["openBelow"] else False):
                continue
            found = count(q)
            if found is None:
                unclear += 1
            elif found != said["unstablePoles"]:
                complaints.append(f"inside at {q}: counted {found}, said {said['unstablePoles']}")
    return complaints, confirmed, unclear


def main():
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("program")
    parser.add_argument("--loops", type=int, default=200)
    parser.add_argument("--seed", type=int, default=1)
    arguments = parser.parse_args()
    rng = np.random.default_rng(arguments.seed)
    program = subprocess.Popen([arguments.program], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True)

    def ask(task):
        program.stdin.write(json.dumps(task) + "\n")
        program.stdin.flush()
        return json.loads(program.stdout.readline())

    totals = {"loops": 0, "edges": 0, "unclear": 0, "errors": 0, "complaints": 0}
    times = []
    for number in range(arguments.loops):
        loop = random_loop(rng)
        tasks = [({"task": "gain", **loop}, check_gain)]
        scale = int(rng.integers(1, 10))
        tasks.append(({"task": "delay", "d": loop["a"], "n": [scale * c for c in loop["b1"]]}, check_delay))
        for task, check in tasks:
            answer = ask(task)
            totals["loops"] += 1
            times.append(answer["milliseconds"])
            if "error" in answer:
                totals["errors"] += 1
                print(f"loop {number}: {answer['error']}\n  {json.dumps(task)}")
                continue
            complaints, confirmed, unclear = check(task, answer)
            totals["edges"] += confirmed
            totals["unclear"] += unclear
            totals["complaints"] += len(complaints)
            for complaint in complaints[:4]:
                print(f"loop {number} {task['task']}: {complaint}\n  {json.dumps(task)}")
    print(totals, f"median {np.median(times):.2f} ms, worst {max(times):.1f} ms")
    return 1 if totals["complaints"] or totals["errors"] else 0


if __name__ == "__main__":
    sys.exit(main())
