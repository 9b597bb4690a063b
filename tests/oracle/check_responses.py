"""Margins, responses and figures at the setting against the loop worked out anew."""

import math

import numpy as np
from flint import arb

import response_tolerances as allowed
from figures import PERCENT, PROVEN, SMALLEST_DEVIATION, STATIC, figure, meets, too_flat
from responses import GivenUp

#: Kinds that follow from L at a crossing, or beside a resonance.
SHARP = {"phase-margin", "delay-margin", "peak-sensitivity"}
#: Points of each curve that are compared.
CURVE_POINTS = 12
DECIBEL_OR_DEGREES = {"gain-margin-up", "gain-margin-down", "phase-margin", "delay-margin", "peak-sensitivity", "bandwidth"}


def check_responses(case, loop, record, report):
    """`margins`, `step`, `load`, and figure and verdict of every requirement."""
    report.equal("setting: stable", True, loop.stable)
    closed = record["closedLoop"]
    report.check(closed and near(closed["knob"], float(case.knob), 1e-15), "setting: knob", float(case.knob), closed and closed["knob"])
    check_figures(case, loop, record, report)
    check_margins(loop, record["margins"], report)
    check_step(case, loop, record["step"], report)
    check_load(loop, record["load"], report)


def near(found, expected, relative):
    """Both none, or as near as allowed."""
    if found is None or expected is None:
        return found is None and (expected is None or math.isinf(expected))
    return found == expected or abs(found - expected) <= relative * abs(expected)


def same(report, what, found, expected, relative, absolute=0.0):
    """One number; none stands for undefined and infinite."""
    if found is not None and expected is not None and abs(found - expected) <= absolute:
        return report.check(True, what, expected, found)
    return report.check(near(found, expected, relative), what, expected, found)


def tolerance(kind):
    """The relative tolerance of a figure."""
    if kind in PROVEN:
        return allowed.POLES
    if kind in STATIC:
        return allowed.STATIC
    if kind == "peak-time":
        return allowed.PLACE_OF_EXTREME
    return allowed.MARGIN if kind in DECIBEL_OR_DEGREES else allowed.ANSWER


def check_figures(case, loop, record, report):
    """Figure and verdict of every requirement."""
    wanted = case.project["requirements"]
    report.equal("requirements: kinds", [r["kind"] for r in wanted], [r["kind"] for r in record["requirements"]])
    for typed, found in zip(wanted, record["requirements"]):
        kind = typed["kind"]
        check_figure(report, f"figure: {kind}", loop, kind, found["figure"])
        report.equal(f"requirements: limit of {kind}", float(typed["limit"]), found["limit"])
        verdict = meets(loop, kind, typed["limit"], allowed.UNDECIDED)
        if verdict is not None:
            report.equal(f"met: {kind}", verdict, found["met"])


def check_figure(report, what, loop, kind, found):
    """A figure of a requirement."""
    try:
        expected = figure(loop, kind)
        if kind == "peak-time" and too_flat(loop):
            return
    except GivenUp:
        return
    relative = tolerance(kind)
    if kind in SHARP:
        relative = max((slack(loop.frequency, c[0]) for c in loop.frequency.gain_crossings), default=relative)
    elif kind in PROVEN:
        relative += allowed.POLE_ROUNDING / nearest_poles(loop)
    same(report, what, found, expected, relative, SMALLEST_DEVIATION if kind in PERCENT else 0.0)


def nearest_poles(loop):
    """The smallest distance of two poles, relative to their size; f64 figures of poles that nearly coincide lose digits by it."""
    poles = [complex(pole) for pole in loop.poles]
    return min((max(abs(a - b), 1e-16 * abs(a)) / abs(a) for i, a in enumerate(poles) for b in poles[:i]), default=1.0)


def check_margins(loop, margins, report):
    """Every crossing and margin, and the drawn frequency response."""
    if not report.check(margins is not None, "margins", "present", margins):
        return
    mine = loop.frequency
    sharpest = max((slack(mine, c[0]) for c in mine.gain_crossings), default=allowed.MARGIN)
    for name, expected in (
        ("gainUp", mine.gain_up),
        ("gainDown", mine.gain_down),
        ("phase", mine.phase_margin),
        ("delay", mine.delay_margin),
        ("peakSensitivity", mine.peak[0]),
        ("bandwidth", mine.bandwidth),
    ):
        same(report, f"margins: {name}", margins[name], expected, allowed.MARGIN if name.startswith("gain") else sharpest)
    if 0 < mine.peak[1] < math.inf and mine.peak[0] > 1.001:
        same(report, "margins: peakFrequency", margins["peakFrequency"], mine.peak[1], 1e2 * allowed.PLACE_OF_EXTREME)
    gain = [(c["omega"], c["phaseMargin"], c["delayMargin"]) for c in margins["gainCrossings"]]
    crossings(report, "margins: gainCrossings", gain, mine.gain_crossings, mine)
    phase = [(c["omega"], c["factor"]) for c in margins["phaseCrossings"]]
    crossings(report, "margins: phaseCrossings", phase, [c for c in mine.phase_crossings if c[0] < math.inf], mine)
    check_curve_over_frequency(loop, margins["response"], report)


def crossings(report, what, found, expected, frequency):
    """Lists of crossings, as tuples that begin with ω."""
    good = len(found) == len(expected) and all(
        near(a, b, slack(frequency, other[0])) for one, other in zip(sorted(found), expected) for a, b in zip(one, other)
    )
    report.check(good, what, expected, found)


def slack(frequency, omega):
    """The tolerance of what follows from L at a frequency in f64: beside a sharp resonance the rounding of ω shows."""
    return allowed.MARGIN + (allowed.OMEGA_ROUNDING * frequency.sharpness(omega) if omega else 0.0)


def check_curve_over_frequency(loop, response, report):
    """Magnitude and phase of the drawn open loop; the phase turns less than half a turn from point to point."""
    omegas = response["omega"]
    if loop.above != 0:
        report.check(omegas == sorted(omegas) and len(omegas) > 50, "margins: response", "ascending frequencies", len(omegas))
    worst = 0.0
    for i in range(0, len(omegas), max(1, len(omegas) // CURVE_POINTS)):
        value = loop.frequency.exact("n", arb(omegas[i])) / loop.frequency.exact("d", arb(omegas[i]))
        magnitude = 20 * math.log10(float(abs(value).mid()))
        turn = (response["phase"][i] - math.degrees(float(value.arg().mid())) + 180) % 360 - 180
        rounding = allowed.OMEGA_ROUNDING * loop.frequency.sharpness(omegas[i])
        worst = max(worst, abs(response["magnitude"][i] - magnitude) / 20 - rounding, abs(turn) / 180 - rounding)
    report.check(worst <= allowed.CURVE, "margins: response", f"points within {allowed.CURVE}", worst)


def check_curve(report, what, curve, answer):
    """Points of a drawn curve over time."""
    times, values = curve["time"], curve["value"]
    size = max(abs(v) for v in values) or 1.0
    picked = range(0, len(times), max(1, len(times) // CURVE_POINTS))
    worst = max(abs(float(answer.exact(arb(times[i]))) - values[i]) for i in picked)
    within = allowed.CURVE * size + allowed.CANCELLED * float(np.abs(answer.c).sum())
    report.check(times[0] == 0 and worst <= within, what, f"points within {within:.3g}", worst)


def check_step(case, loop, step, report):
    """The answer of the output, and the controller's."""
    output, control = loop.answer("output"), loop.answer("controller")
    if output is None:
        report.equal("step", None, step)
        return
    if not report.check(step is not None, "step", "present", step):
        return
    same(report, "step: finalValue", step["finalValue"], output.end, allowed.STATIC)
    names = {
        "overshoot": "overshoot",
        "undershoot": "undershoot",
        "riseTime": "rise-time",
        "settlingTime2": "settling-time-2",
        "settlingTime5": "settling-time-5",
        "peakTime": "peak-time",
        "controllerPeak": "controller-peak",
    }
    for name, kind in names.items():
        check_figure(report, f"step: {name}", loop, kind, step[name])
    check_curve(report, "step: curve", step["curve"], output)
    report.equal("step: controller", control is not None, step["controller"] is not None)
    if control and step["controller"]:
        check_curve(report, "step: controller curve", step["controller"], control)
    for edge in step["atEdges"]:
        other = loop.at_knob(case, edge["knob"]).answer("output")
        check_curve(report, "step: curve at an edge", edge["curve"], other)


def check_load(loop, load, report):
    """The answer to a load."""
    answer = loop.answer("load")
    if answer is None:
        report.equal("load", None, load)
        return
    if not report.check(load is not None, "load", "present", load):
        return
    check_figure(report, "load: peak", loop, "load-peak", load["peak"])
    same(report, "load: finalValue", load["finalValue"], answer.end, allowed.STATIC)
    check_curve(report, "load: curve", load["curve"], answer)
