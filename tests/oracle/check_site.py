"""The site check: plants of known gain factor and dead time are measured by simulation, and both must be found again.

The model is the plant without either; what is typed as seen is read off the simulated record.
"""

import json
import math
from fractions import Fraction
from random import Random

import numpy as np

import delayed
from notation import evaluate
from report import Report

#: Random machines; every other one is seen oscillating.
SEEDS = 40
#: Both corrections are found within this part, the promise of the site check.
FOUND = 0.02
#: Swings of a sustained oscillation that are simulated, and how much one may differ from the next.
SWINGS = 14
SUSTAINED = 0.01
#: Digits of what is typed: a good recorder's.
DIGITS = 6


def polynomial(*factors):
    """The product of polynomials, highest power first."""
    product = np.array([1.0])
    for factor in factors:
        product = np.polymul(product, factor)
    return product


def machine(rng):
    """Text of a plant and the same as coefficients: invented machines of order 3 to 5 that a gain alone brings to oscillate."""
    unit = 10 ** rng.uniform(-2, 1)
    times = [float(f"{unit * 10 ** rng.uniform(-0.7, 0.7):.3g}") for _ in range(4)]
    a, b, c, d = (np.array([t, 1.0]) for t in times)
    s = np.array([1.0, 0.0])
    lag = lambda t: f"({t} s + 1)"
    t = [lag(x) for x in times]
    kinds = [
        (f"1/({t[0]}{t[1]}{t[2]})", [1.0], polynomial(a, b, c)),
        (f"1/(s {t[0]}{t[1]})", [1.0], polynomial(s, a, b)),
        (f"1/({t[0]}{t[1]}{t[2]}{t[3]})", [1.0], polynomial(a, b, c, d)),
        (f"({4 * times[0]:.6g} s + 1)/(s^2 {t[0]}{t[1]})", [float(f"{4 * times[0]:.6g}"), 1.0], polynomial(s, s, a, b)),
    ]
    return rng.choice(kinds)


def site_case(seed):
    """A project with what was seen, and the true factor and dead time; None where the drawn machine cannot be measured."""
    rng = Random(f"stayband site {seed}")
    text, above, below = machine(rng)
    model = delayed.Plant(1.0, above, below)
    _, omega = delayed.limit(model, 0.0) or (None, None)
    if omega is None:
        return None
    gain = float(f"{rng.uniform(0.7, 1.4):.4g}")
    dead_time = float(f"{rng.uniform(0.03, 0.3) / omega:.4g}")
    factor, _ = delayed.limit(delayed.Plant(gain, above, below), dead_time)
    seen = observed_oscillation if seed % 2 else observed_step
    part = 1.0 if seed % 2 else rng.uniform(0.3, 0.6)
    observation = seen(float(f"{factor * part:.{DIGITS}g}"), gain, above, below, dead_time)
    if observation is None:
        return None
    project = {
        "format": "stayband-project/1",
        "title": f"site {seed}",
        "loop": {"controller": "K", "plant": text},
        "knob": "K",
        "siteCheck": observation,
    }
    return project, gain, dead_time


def observed_step(knob, gain, above, below, dead_time):
    """Overshoot and period of the simulated step."""
    plant = delayed.Plant(knob * gain, above, below)
    _, omega = delayed.limit(plant, dead_time)
    times, values = delayed.step(plant, dead_time, 5 * math.tau / omega)
    end = plant.at(1e-9 * omega).real
    end = end / (1 + end)
    highest = delayed.peaks(times, values)
    if len(highest) < 2 or highest[0][1] < 1.02 * end:
        return None
    overshoot = 100 * (highest[0][1] / end - 1)
    typed = lambda x: f"{x:.{DIGITS}g}"
    return {"seen": "step", "setting": typed(knob), "period": typed(highest[1][0] - highest[0][0]), "overshoot": typed(overshoot)}


def observed_oscillation(knob, gain, above, below, dead_time):
    """The period of the simulated oscillation, once other modes have died out."""
    plant = delayed.Plant(knob * gain, above, below)
    _, omega = delayed.limit(plant, dead_time)
    times, values = delayed.step(plant, dead_time, SWINGS * math.tau / omega)
    highest = delayed.peaks(times, values)[-6:]
    sizes = [value - values[len(values) // 2 :].mean() for _, value in highest]
    if len(highest) < 6 or max(sizes) > (1 + 5 * SUSTAINED) * min(sizes):
        return None
    period = (highest[-1][0] - highest[0][0]) / (len(highest) - 1)
    return {"seen": "oscillation", "setting": f"{knob:.{DIGITS}g}", "period": f"{period:.{DIGITS}g}"}


def check_site(seed, records):
    """(project, report) of one machine."""
    report = Report()
    case = site_case(seed)
    if case is None:
        return "", report
    project, gain, dead_time = case
    text = json.dumps(project)
    answer = records.ask(text)["answer"]
    if not report.check(answer["record"] is not None, "a record", "a record", answer["problems"]):
        return text, report
    found = answer["record"]["sheet"]["siteCheck"]
    correction = found["correction"]
    if not report.check(correction is not None, "site: a correction", (gain, dead_time), found["remarks"]):
        return text, report
    report.check(abs(correction["gain"] / gain - 1) <= FOUND, "site: gain factor", gain, correction["gain"])
    report.check(abs(correction["deadTime"] / dead_time - 1) <= FOUND, "site: dead time", dead_time, correction["deadTime"])
    check_corrected(project, correction, report)
    return text, report


def check_corrected(project, correction, report):
    """The corrected project is the old one with both numbers put in, to four digits."""
    loop = correction["project"]["loop"]
    typed, _, rest = loop["plant"].partition(" (")
    report.check(abs(float(typed) / correction["gain"] - 1) < 1e-3, "site: gain in the project", correction["gain"], loop["plant"])
    report.equal("site: plant in the project", project["loop"]["plant"] + ")", rest)
    time = float(loop["deadTime"])
    report.check(abs(time / correction["deadTime"] - 1) < 1e-3, "site: dead time in the project", correction["deadTime"], loop["deadTime"])
