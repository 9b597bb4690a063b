"""The step-up plan: rows on the grid, in order, and what they predict, from the roots of the polynomial at each row."""

import math
from fractions import Fraction

import numpy as np

from knobs import scale_knob
from polynomials import rational

#: Poles from a companion matrix in f64 against refined ones, relative, for loops of the orders tried here.
POLES = 1e-4


def check_step_up(case, record, report):
    """`sheet.stepUp`."""
    plan = record["sheet"]["stepUp"]
    if not plan["rows"]:
        report.check(bool(plan["remarks"]), "plan: remark", "why there is none", plan["remarks"])
        return
    settings = [Fraction(row["setting"]) for row in plan["rows"]]
    knobs = [scale_knob(case.project, setting) for setting in settings]
    chosen = case.project["setting"].get("value") or (record["permitted"]["suggested"] or {}).get("setting")
    report.equal("plan: last", Fraction(chosen), settings[-1])
    growing = all(0 < a / b < 1 for a, b in zip(knobs, knobs[1:]))
    report.check(growing, "plan: order", "growing sizes of the knob", [float(q) for q in knobs])
    step = case.project["setting"].get("step")
    if step:
        inner = settings[:-1]
        report.check(all((s / Fraction(step)).denominator == 1 for s in inner), "plan: grid", step, plan["rows"])
    for row, knob in zip(plan["rows"], knobs):
        check_row(case, record, plan, row, knob, report)


def check_row(case, record, plan, row, knob, report):
    """Stable, permitted as the record says, and its oscillation the least damped pair."""
    what = f"plan: row {row['setting']}"
    stable = [r for r in record["stability"] if r["stable"] and inside(r, knob)]
    report.check(len(stable) == 1, f"{what}: stable", "in a stable range", row)
    far = stable and stable[0]["to" if knob > 0 else "from"]
    if plan["edge"]:
        report.check(far and far["value"] == plan["edge"]["knob"], f"{what}: edge", far, plan["edge"])
        report.check(near(row["room"], far["value"] / float(knob), 1e-12), f"{what}: room", far["value"] / float(knob), row["room"])
    p = case.loop.at(rational(knob))
    leading = int(p[p.degree()])
    scale = max(abs(Fraction(int(p[i]), leading)) ** Fraction(1, p.degree() - i) for i in range(p.degree()))
    poles = np.roots([float(Fraction(int(p[i]), leading)) * float(scale) ** (i - p.degree()) for i in range(p.degree(), -1, -1)])
    pairs = [z * float(scale) for z in poles if z.imag > POLES * abs(z)]
    if row["period"] is None:
        return
    best = min(pairs, key=lambda z: -z.real / abs(z))
    report.check(near(row["damping"], -best.real / abs(best), POLES * 10), f"{what}: damping", -best.real / abs(best), row["damping"])
    report.check(near(row["period"] * row["omega"], math.tau, 1e-12), f"{what}: period", math.tau / row["omega"], row["period"])
    decay = math.exp(-math.tau * row["damping"] / math.sqrt(1 - row["damping"] ** 2))
    report.check(near(row["decay"], decay, 1e-9), f"{what}: decay", decay, row["decay"])
    if row["stop"]:
        report.check(row["decay"] < row["stop"]["decay"] < 1, f"{what}: stop", "between the row and the edge", row)


def near(a, b, part):
    return abs(a - b) <= part * abs(b)


def inside(r, knob):
    low, high = (r[end] and Fraction(r[end]["value"]) for end in ("from", "to"))
    return (low is None or low < knob) and (high is None or knob < high)
