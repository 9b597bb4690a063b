"""Answers, margins and the longest period of a sampled loop, by event-by-event simulation and dense evaluation.

The plant is moved from event to event by ball matrix exponentials; the controller is its difference equation.
"""

import cmath
import math
from fractions import Fraction

from flint import acb, acb_poly, arb, arb_mat, ctx

from sampled_truth import Truth, ball, controller

#: Points of a curve that are compared, of those within so many sample periods.
LOOKS, LOOKED_AT = 8, 15
#: A look nearer than this part of a period to a change of the hold is left out.
BESIDE_JUMP = 1e-6
#: Answers agree to this part of the largest value: the cubic between two points is right to 1e-4 of a fast mode.
ANSWER = 2e-4
#: Frequencies, factors and angles are refined to 40 bits or more.
MARGIN = 1e-7
#: Points of the dense evaluation.
DENSE = 4000


class Simulation:
    """A loop with the given knob, from rest."""

    def __init__(self, case, knob):
        ctx.prec = 300
        self.case, self.knob = case, knob
        below = [Fraction(c) for c in case.plant_below]
        self.order = len(below) - 1
        above = [Fraction(c) for c in case.plant_above] + [Fraction(0)] * (self.order + 1 - len(case.plant_above))
        self.direct = above[self.order] / below[self.order]
        self.row = [ball((above[i] - self.direct * below[i]) / below[self.order]) for i in range(self.order)]
        size = self.order + 1
        self.matrix = [[ball(0)] * size for _ in range(size)]
        for i in range(self.order - 1):
            self.matrix[i][i + 1] = ball(1)
        for i in range(self.order):
            self.matrix[self.order - 1][i] = ball(-below[i] / below[self.order])
        self.matrix[self.order - 1][self.order] = ball(1)
        self.powers = {}
        n, d = controller(case.controller_above, case.controller_below, case.method, case.period, case.prewarp)
        n = n * ball(knob)
        if case.fixed_above is not None:
            m, e = controller(*case.fixed_above, case.method, case.period, case.prewarp)
            n, d = n * e + m * d, d * e
        order = d.degree()
        lead = d[order]
        self.b = [n[order - i] / lead for i in range(order + 1)]
        self.a = [d[order - i] / lead for i in range(order + 1)]

    def moved(self, x, u, time):
        """The state after a time with a constant input."""
        if time not in self.powers:
            self.powers[time] = (arb_mat(self.matrix) * ball(time)).exp()
        power = self.powers[time]
        full = x + [u]
        return [sum((power[i, k] * full[k] for k in range(self.order + 1)), arb(0)) for i in range(self.order)]

    def run(self, command, load, looks):
        """The output and the hold's output at the looks (fractions, s)."""
        case = self.case
        h, late = case.period, case.computation * case.period
        shift = late + case.dead_time
        end = max(looks)
        # In the plant's own time t, dead time in front: holds at k·h + shift, samples at k·h, the load at its dead time.
        events = []
        for k in range(int(end / h) + 1):
            events.append((k * h, 1, "sample", k))
            events.append((k * h + shift, 0 if shift else 2, "hold", k))
        events.append((case.dead_time, 0, "load", 0))
        events += [(t, 3, "look", i) for i, t in enumerate(looks)]
        events.sort(key=lambda e: (e[0], e[1]))
        x, now = [arb(0)] * self.order, Fraction(0)
        held, pushed = arb(0), arb(0)
        errors, controls, outputs = [], [], [None] * len(looks)
        for time, _, kind, k in events:
            if time > end:
                break
            if time > now:
                x, now = self.moved(x, held + pushed, time - now), time

            def y(u):
                return sum((c * v for c, v in zip(self.row, x)), arb(0)) + ball(self.direct) * u

            if kind == "load":
                pushed = arb(load)
            elif kind == "hold":
                held = controls[k]
            elif kind == "look":
                outputs[k] = float(y(held + pushed).mid())
            else:
                known = sum((self.b[i] * errors[k - i] for i in range(1, min(k, len(self.b) - 1) + 1)), arb(0))
                known -= sum((self.a[i] * controls[k - i] for i in range(1, min(k, len(self.a) - 1) + 1)), arb(0))
                if shift:
                    error = arb(command) - y(held + pushed)
                    u = known + self.b[0] * error
                else:
                    u = (known + self.b[0] * (arb(command) - y(pushed))) / (1 + self.b[0] * ball(self.direct))
                    error = arb(command) - y(pushed + u)
                errors.append(error)
                controls.append(u)
        holds = []
        for t in looks:
            k = math.floor((t - late) / h)
            holds.append(float(controls[k].mid()) if k >= 0 else 0.0)
        return outputs, holds


def points(curve, case):
    """Some points of a curve as (time, value), times exact."""
    h = float(case.period)
    jumps = [float(case.computation), float(case.delay / case.period)]

    def clear(t):
        return all(abs((t / h - jump) - round(t / h - jump)) > BESIDE_JUMP for jump in jumps)

    usable = [(t, y) for t, y in zip(curve["time"], curve["value"]) if 0 < t <= LOOKED_AT * h and clear(t)]
    step = max(1, len(usable) // LOOKS)
    return [(Fraction(t), y) for t, y in usable[step // 2 :: step]]


def check_answers(case, knob, record):
    """What is wrong with the answers, and how many values were compared."""
    if record["step"] is None:
        return [], 0
    simulation = Simulation(case, knob)
    faults, checked = [], 0
    parts = [("output", record["step"]["curve"], (1, 0, 0)), ("control", record["step"]["controller"], (1, 0, 1))]
    if record["load"] is not None:
        parts.append(("load", record["load"]["curve"], (0, 1, 0)))
    for name, curve, (command, load, which) in parts:
        looks = points(curve, case)
        if not looks:
            continue
        wanted = simulation.run(command, load, [t for t, _ in looks])[which]
        size = max(map(abs, curve["value"])) or 1.0
        for (t, found), y in zip(looks, wanted):
            checked += 1
            if not abs(found - y) <= ANSWER * size:
                faults.append(f"{name} at {float(t)!r} s: {found!r}, not {y!r}")
    return faults, checked


class Curve:
    """The open loop on the unit circle."""

    def __init__(self, case, knob):
        ctx.prec = 300
        truth = Truth(case)
        n, d = controller(case.controller_above, case.controller_below, case.method, case.period, case.prewarp)
        if case.fixed_above is not None:
            raise ValueError("only where the knob is the loop gain")
        self.above, self.below = truth.n * ball(knob), truth.d

    def at(self, angle):
        """L(e^(j·angle))."""
        z = acb(0, arb(angle)).exp()
        value = acb_poly(self.above)(z) / acb_poly(self.below)(z)
        return complex(float(value.real.mid()), float(value.imag.mid()))


def check_margins(case, knob, record):
    """What is wrong with the margins, and how many facts were checked."""
    if record["margins"] is None or case.fixed_above is not None:
        return [], 0
    h = float(case.period)
    curve, margins, faults, checked = Curve(case, knob), record["margins"], [], 0

    def expect(condition, text):
        nonlocal checked
        checked += 1
        if not condition:
            faults.append(text)

    for c in margins["gainCrossings"]:
        value = curve.at(c["omega"] * h)
        expect(abs(abs(value) - 1) < 1e-6, f"|L| = {abs(value)} at the gain crossing {c['omega']}")
        margin = math.degrees(cmath.phase(-value))
        expect(abs((margin - c["phaseMargin"] + 180) % 360 - 180) < 1e-4, f"phase margin {margin}, not {c['phaseMargin']}")
    for c in margins["phaseCrossings"]:
        if c["omega"] == 0:
            continue
        value = curve.at(c["omega"] * h)
        expect(abs(c["factor"] * value + 1) < 1e-5, f"{c['factor']}·L = {c['factor'] * value} at {c['omega']}, not −1")
    # Dense: none missed, and no larger sensitivity.
    angles = [math.pi * (k + 0.5) / DENSE for k in range(DENSE)]
    angles = sorted(angles + [math.pi * 10 ** (-6 * k / 300) for k in range(1, 300)])
    values = [curve.at(a) for a in angles]
    crossings = sum((abs(a) > 1) != (abs(b) > 1) for a, b in zip(values, values[1:]))
    expect(crossings <= len(margins["gainCrossings"]), f"{crossings} gain crossings, found {len(margins['gainCrossings'])}")
    peak = max(abs(1 / (1 + v)) for v in values)
    told = margins["peakSensitivity"]
    expect(peak <= told * (1 + 1e-9), f"sensitivity {peak}, above {told}")
    there = abs(1 / (1 + curve.at(min(margins["peakFrequency"] * h, math.pi))))
    expect(abs(there - told) < 1e-6 * there, f"sensitivity {there} at its peak, not {told}")
    return faults, checked


def check_period(case, knob, longest):
    """Whether the longest period is one: counts on both sides."""
    if longest is None or case.method in ("matched", "in z"):
        return [], 0
    faults = []
    for factor, stable in ((1 - Fraction(1, 10**5), True), (1 + Fraction(1, 10**5), False)):
        other = case.at_period(Fraction(longest) * factor)
        count = Truth(other).outside(knob)
        if (count == 0) != stable:
            faults.append(f"{count} poles outside at {float(factor)!r} of the longest period {longest}")
    return faults, 2
