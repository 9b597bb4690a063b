"""Seeded random loops with a stable setting, requirements and a controller's scale.

Each family is a shape of loop that margins or responses go wrong on easily. Limits lie around the figures at the setting, so that
edges fall inside the stable ranges, and now and then so far off that no setting meets them.
"""

import json
import math
from dataclasses import dataclass
from fractions import Fraction
from random import Random

from flint import ctx

from cases import decimal_text, project
from figures import AT_LEAST, FIGURES, figure
from generator import ONE, Factor, Writer, constant, poly, quotient
from knobs import scale_knob
from polynomials import Characteristic, Knobbed, Ratio, knob, laplace, number, rational
from refining import BITS
from responses import GivenUp, LoopAt

#: Seeds of loops whose limits are drawn freely, so that most exclude each other; the seeds after them have limits that the setting
#: meets, so that something is permitted. Every family comes equally often.
FREE_LIMITS = 132
SEEDS = 198
#: Draws until a loop with a stable setting is given up; most need one or two.
MOST_DRAWS = 60
#: Knob values tried for stability on each side of zero, evenly spaced on a logarithmic scale.
TRIED = 61


@dataclass
class RequirementCase:
    """A project and, beside it, the same loop as exact blocks."""

    name: str
    project: dict
    blocks: tuple
    positive: bool
    knob: Fraction

    @property
    def text(self):
        return json.dumps(self.project, ensure_ascii=False)

    @property
    def loop(self):
        return Characteristic.closed(*self.blocks, self.positive)


K = Factor("K", knob(), 0)


def factor(text, *coefficients):
    """A factor with the same polynomial as text and as value, lowest power first."""
    return Factor(text, poly(*coefficients), len(coefficients) - 1)


def resonance(writer, damping, about=1):
    """A pair with this damping ratio near the loop's scale."""
    w = writer.size_near(about)
    twice = Fraction(f"{float(2 * damping * w):.3g}")
    if twice == 0:
        return factor(f"(s^2 + {decimal_text(w * w)})", w * w, 0, 1)
    return factor(f"(s^2 + {decimal_text(twice)} s + {decimal_text(w * w)})", w * w, twice, 1)


class NearWriter(Writer):
    """Factors within two decades or so, so that the responses show them all."""

    def size(self):
        return self.size_near(self.rng.choice([Fraction(1, 3), 1, 1, 2, 5]))

    def size_near(self, about):
        return Fraction(f"{float(self.scale * about) * 10 ** self.rng.uniform(-0.35, 0.35):.2g}")

    def lag(self, right=False):
        a = self.size()
        return factor(f"(s {'-' if right else '+'} {decimal_text(a)})", -a if right else a, 1)


def lags(w, order):
    def one(left):
        return w.lag() if w.rng.random() < 0.7 or left < 2 else resonance(w, Fraction(w.rng.choice([2, 5, 8]), 10))

    below = [one(left) for left in range(order, 0, -1)]
    return quotient(w.rng, K, [], []), quotient(w.rng, constant(w), [], below), ONE


def integrating(w, order):
    """Type 1 or 2 with a lead."""
    double = order > 2 and w.rng.random() < 0.4
    below = [w.integrator()] * (2 if double else 1) + w.factors(order - (2 if double else 1), 0, 0)
    above = [w.lag()] if double or w.rng.random() < 0.5 else []
    cut = w.rng.randint(0, 1)
    return quotient(w.rng, K, above, below[:cut]), quotient(w.rng, constant(w), [], below[cut:]), ONE


def conditional(w, order):
    """Three integrators and two zeros: stable from some gain on, with far lags up to some gain."""
    zeros = [factor(f"(s + {decimal_text(a)})", a, 1) for a in (w.size_near(Fraction(1, 3)), w.size_near(Fraction(1, 3)))]
    far = [factor(f"(s + {decimal_text(a)})", a, 1) for a in (w.size_near(10) for _ in range(max(order - 3, 0)))]
    return quotient(w.rng, K, zeros, []), quotient(w.rng, constant(w), [], [w.integrator()] * 3 + far), ONE


def unstable_at_zero(w, order):
    """A pole right of the axis."""
    a = w.size_near(Fraction(1, 3))
    right = factor(f"(s - {decimal_text(a)})", -a, 1)
    others = [factor(f"(s + {decimal_text(b)})", b, 1) for b in (w.size_near(3) for _ in range(order - 1))]
    above = [w.lag()] if w.rng.random() < 0.5 else []
    return quotient(w.rng, K, above, []), quotient(w.rng, constant(w), [], [right] + others), ONE


def non_minimum_phase(w, order):
    """One or two zeros right of the axis: undershoot."""
    zeros = [w.lag(right=True) for _ in range(1 if order < 4 else w.rng.randint(1, 2))]
    below = w.factors(order, 0, 0.2)
    return quotient(w.rng, K, [], []), quotient(w.rng, constant(w), zeros, below), ONE


def several_crossovers(w, order):
    """Lightly damped resonances above the first crossover."""
    pairs = [resonance(w, Fraction(w.rng.choice([2, 5, 10, 30]), 1000), about) for about in (2, 6)[: (order - 1) // 2]]
    rest = order - 2 * len(pairs)
    first = [] if not rest else [w.integrator()] if w.rng.random() < 0.6 else [w.lag()]
    below = first + [w.lag() for _ in range(rest - 1)] + pairs
    above = [resonance(w, Fraction(3, 100), 4)] if order > 4 and w.rng.random() < 0.5 else []
    return quotient(w.rng, K, [], []), quotient(w.rng, constant(w), above, below), ONE


def undamped(w, order):
    """A pair of open-loop poles, or of zeros, exactly on the axis."""
    pair, rest = resonance(w, 0), [w.lag() for _ in range(max(order - 2, 0))]
    if w.rng.random() < 0.5 or order < 3:
        return quotient(w.rng, K, [w.lag()], []), quotient(w.rng, constant(w), [], [pair] + rest), ONE
    return quotient(w.rng, K, [], []), quotient(w.rng, constant(w), [pair], rest + [w.lag(), w.lag()]), ONE


def with_sensor(w, order):
    """A sensor with a gain and a lag of its own."""
    below = w.factors(order - 1, 0, 0.25)
    t = Fraction(f"{float(1 / w.size_near(8)):.2g}")
    sensor = quotient(w.rng, constant(w), [], [factor(f"({decimal_text(t)} s + 1)", 1, t)])
    return quotient(w.rng, K, [], []), quotient(w.rng, constant(w), [w.lag()] if order > 3 else [], below), sensor


def time_constant(w, order):
    """The knob is a time constant: derivative, integral or lag time."""
    below = w.factors(order - 1, 0, 0.3)
    gain = Factor(decimal_text(w.size() / w.scale), None, 0)
    gain.value = number(Fraction(gain.text))
    place = w.rng.randrange(3)
    lead = Factor("(1 + K s)", Ratio(Knobbed([[1], [0, 1]])), 1)
    if place == 0:
        return quotient(w.rng, gain, [lead], []), quotient(w.rng, constant(w), [], below + [w.lag()]), ONE
    if place == 1:
        lag = Factor("(K s + 1)", Ratio(Knobbed([[1], [0, 1]])), 1)
        return quotient(w.rng, gain, [], []), quotient(w.rng, constant(w), [], [lag] + below), ONE
    controller = Factor(f"{gain.text} (1 + 1/(K s))", gain.value * (number(1) + number(1) / (knob() * laplace())), 0)
    return controller, quotient(w.rng, constant(w), [], w.factors(order - 1, 0, 0)), ONE


def bi_proper(w, order):
    """As many zeros as poles: the answer jumps at the start."""
    return quotient(w.rng, K, w.factors(order, 0, 0), []), quotient(w.rng, constant(w), [], w.factors(order, 0, 0.2)), ONE


def mixed(w, order):
    """Anything, cancelled factors included."""
    below, above = w.factors(order, 0.1, 0.2), w.factors(w.rng.randint(0, order - 1), 0.15, 0.05)
    if above and w.rng.random() < 0.3:
        same = [f for f in below if f.degree == above[-1].degree]
        above[-1] = same[0] if same else above[-1]
    cut = w.rng.randint(0, len(below))
    cut_above = w.rng.randint(0, len(above))
    sensor = quotient(w.rng, constant(w), [], []) if w.rng.random() < 0.4 else ONE
    return quotient(w.rng, K, above[:cut_above], below[:cut]), quotient(w.rng, constant(w), above[cut_above:], below[cut:]), sensor


FAMILIES = (
    lags,
    integrating,
    conditional,
    unstable_at_zero,
    non_minimum_phase,
    several_crossovers,
    undamped,
    with_sensor,
    time_constant,
    bi_proper,
    mixed,
)


def requirement_case(seed):
    """The random loop of this seed."""
    ctx.prec = BITS
    rng = Random(f"stayband requirements {seed}")
    family = FAMILIES[seed % len(FAMILIES)]
    for _ in range(MOST_DRAWS):
        writer = NearWriter(rng)
        writer.scale = Fraction(10) ** rng.choice([-1, 0, 0, 0, 1, 2])
        writer.naming = False
        order = rng.randint(2, 8) if family is not conditional else rng.randint(3, 8)
        controller, plant, sensor = family(writer, order)
        positive = rng.random() < 0.1
        case = RequirementCase(f"requirements {seed}", {}, tuple(b.value for b in (controller, plant, sensor)), positive, Fraction(0))
        values = stable_values(case, rng, family is time_constant)
        if values and 2 <= case.loop.order <= 8:
            break
    else:
        raise ValueError(f"no stable loop for seed {seed}")
    # Settings near the stability limit are the interesting ones.
    values.sort(key=abs)
    wanted = rng.choice(values[-max(1, len(values) // 3) :] if rng.random() < 0.6 else values)
    setting, quantities = scale_for(rng, wanted)
    feedback = "positive" if positive else "negative"
    texts = (controller.text, plant.text, sensor.text, feedback)
    case.project = project(case.name, *texts, quantities=writer.quantities + quantities)
    case.project["setting"] = setting
    case.knob = scale_knob(case.project, Fraction(setting["value"]))
    if not at(case, case.knob).stable:
        case.project["setting"], case.knob = {"value": decimal_text(wanted)}, wanted
    case.project["requirements"] = requirements(rng, case, seed >= FREE_LIMITS)
    return case


def own_case(limits):
    """A positioning axis, invented data, on a gain scale with a grid; `limits` by kind."""
    ctx.prec = BITS
    below = [factor("s", 0, 1), factor("(s + 8)", 8, 1), factor("(s + 20)", 20, 1)]
    plant = quotient(Random(0), factor("40", 40), [], below)
    document = project("axis of our own, invented data", "K", plant.text)
    document["setting"] = {"value": "80", "direction": "proportional", "factor": "0.25", "minimum": "0.5", "maximum": "400", "step": "0.5"}
    document["requirements"] = [{"kind": kind, "limit": limit} for kind, limit in limits.items()]
    return RequirementCase("own", document, (K.value, plant.value, number(1)), False, scale_knob(document, Fraction(80)))


def at(case, value):
    return LoopAt(case, rational(value))


def stable_values(case, rng, positive_only):
    """Stable knob values of three digits."""
    middle, found = rng.uniform(-0.2, 0.2), []
    for k in range(TRIED):
        size = Fraction(f"{10 ** (middle + (k - TRIED // 2) / 6):.2e}")
        found += [v for v in ((size,) if positive_only else (size, -size)) if at(case, v).stable]
    return found


def scale_for(rng, wanted):
    """A controller's scale whose setting gives about this knob, as in the project; its quantities."""
    reciprocal = rng.random() < 0.4
    chain = rng.random() < 0.3
    a, b = (Fraction(f"{10 ** rng.uniform(-1, 1):.2g}") for _ in range(2))
    plain = rng.random() < 0.3 and not reciprocal
    factor_value = Fraction(1) if plain else a * b if chain else Fraction(f"{10 ** rng.uniform(-1.5, 2):.2g}")
    text = "" if plain else "g_a g_b" if chain else decimal_text(factor_value)
    if (reciprocal and wanted < 0) or (not plain and rng.random() < 0.1 and wanted < 0):
        factor_value, text = -factor_value, "-" + text
    value = factor_value / wanted if reciprocal else wanted / factor_value
    value = Fraction(f"{float(value):.2e}")
    setting = {"value": decimal_text(value), "direction": "reciprocal" if reciprocal else "proportional", "factor": text}
    if rng.random() < 0.5:
        low, high = sorted([value * Fraction(rng.randint(5, 90), 100), value * Fraction(rng.randint(11, 90), 10)])
        setting["minimum"] = decimal_text(low) if rng.random() < 0.7 else ""
        setting["maximum"] = decimal_text(high) if rng.random() < 0.7 else ""
    if rng.random() < 0.7:
        power = math.floor(math.log10(abs(value))) - rng.choice([0, 1, 1, 2])
        setting["step"] = decimal_text(Fraction(10) ** power * rng.choice([1, 1, 2, 5]))
    return setting, [("g_a", decimal_text(a)), ("g_b", decimal_text(b))] if chain and text else []


def requirements(rng, case, all_met):
    """Four to eight requirements with limits around the figures at the setting, or of figures that all meet theirs."""
    loop = at(case, case.knob)
    figures = {kind: known_figure(loop, kind) for kind in sorted(FIGURES)}
    kinds = [kind for kind, found in figures.items() if not all_met or can_be_met(found, kind)]
    listed = []
    for kind in rng.sample(kinds, rng.randint(4, 8)):
        found = figures[kind]
        if found is None or math.isinf(found) or found < 1e-6:
            limit = Fraction(rng.choice(TYPICAL[kind]))
        else:
            easy = rng.uniform(0.4, 0.98) if all_met or rng.random() < 0.75 else rng.uniform(1.05, 1.8)
            limit = Fraction(f"{found * (easy if kind in AT_LEAST else 1 / easy):.2e}")
        listed.append({"kind": kind, "limit": decimal_text(allowed(kind, limit))})
    return listed


def known_figure(loop, kind):
    """The figure, or None also where the oracle gives up."""
    try:
        return figure(loop, kind)
    except GivenUp:
        return None


def can_be_met(found, kind):
    """Whether some limit suits a figure at the setting."""
    if kind in AT_LEAST:
        return found is not None and found > 1e-6
    return found is not None and not math.isinf(found) and (kind != "peak-sensitivity" or found > 1.03)


def allowed(kind, limit):
    """A limit within what the kind takes."""
    if kind == "damping-ratio":
        return min(limit, Fraction(9, 10))
    if kind == "phase-margin":
        return min(limit, Fraction(120))
    return max(limit, Fraction(102, 100)) if kind == "peak-sensitivity" else limit


#: Limits where the figure at the setting is zero, infinite or undefined; invented.
TYPICAL = {kind: ["1", "10"] for kind in FIGURES} | {
    "damping-ratio": ["0.3", "0.7"],
    "gain-margin-up": ["6", "12"],
    "gain-margin-down": ["6"],
    "phase-margin": ["30", "60"],
    "peak-sensitivity": ["1.5", "2"],
    "overshoot": ["0", "5", "16.3", "25"],
    "undershoot": ["0", "5", "20"],
    "step-error": ["1", "5"],
    "delay-margin": ["0.02"],
}
