"""Permitted settings: the common part of everything, its settings on the controller's grid, the suggestion, and conflicts."""

import math
from fractions import Fraction
from itertools import combinations

import response_tolerances as allowed
from knobs import scale_knob, scale_setting

#: Digits to which ends are rounded inward where the controller has no grid.
END_DIGITS = 4


def check_permitted(case, record, report):
    """`permitted` of the record, from its own lanes."""
    stable = joined_stable(record)
    base = common(stable, [controller_range(case.project)])
    lanes = [[interval(r) for r in q["ranges"]] for q in record["requirements"]]
    expected = base
    for lane in lanes:
        expected = common(expected, lane)
    permitted = record["permitted"]
    found = [interval(r) for r in permitted["knob"]]
    good = len(found) == len(expected) and all(
        x == y or abs(x - y) <= 1e-12 * abs(y) for one, other in zip(found, expected) for x, y in zip(one, other)
    )
    report.check(good, "permitted: common part", expected, found)
    lanes_proven = all(q["proven"] for q in record["requirements"])
    report.check(not permitted["proven"] or lanes_proven, "permitted: proven", lanes_proven, permitted["proven"])
    for r, ends in zip(permitted["knob"], permitted["setting"]):
        check_ends(case, interval(r), ends, report)
    report.equal("permitted: as many settings as ranges", len(permitted["knob"]), len(permitted["setting"]))
    check_suggestion(case, found, permitted["suggested"], report)
    check_conflict(record, found, base, lanes, stable, report)


def interval(r):
    """A range as a pair of numbers."""
    return (r["from"]["knob"] if r["from"] else -math.inf, r["to"]["knob"] if r["to"] else math.inf)


def joined_stable(record):
    """The stable ranges as the record has them."""
    value = lambda edge, far: edge["value"] if edge else far
    return [(value(r["from"], -math.inf), value(r["to"], math.inf)) for r in record["stability"] if r["stable"]]


def common(some, others):
    """The common part of two sets of open intervals."""
    pairs = [(max(a[0], b[0]), min(a[1], b[1])) for a in some for b in others]
    return sorted(p for p in pairs if p[0] < p[1])


def limits_of(project):
    """Smallest and largest setting the controller takes; None where open."""
    bounds = [Fraction(text) if (text := project["setting"].get(name, "")) else None for name in ("minimum", "maximum")]
    if project["setting"].get("direction") == "reciprocal":
        bounds[0] = max(bounds[0] or Fraction(0), Fraction(0))
    return bounds


def controller_range(project):
    """The knob values the controller can set."""
    low, high = limits_of(project)
    reciprocal = project["setting"].get("direction") == "reciprocal"
    far = math.copysign(math.inf, scale_knob(project, Fraction(1)))
    if reciprocal:
        ends = (far if low == 0 else float(scale_knob(project, low)), 0.0 if high is None else float(scale_knob(project, high)))
    else:
        ends = (-far if low is None else float(scale_knob(project, low)), far if high is None else float(scale_knob(project, high)))
    return tuple(sorted(ends))


def takes(project, setting):
    low, high = limits_of(project)
    return (low is None or low <= setting) and (high is None or setting <= high)


def surely(knobs, knob, slack):
    """True or false; None where a knob lies at an end."""
    if knob is None:
        return False
    for end in knobs:
        if math.isfinite(end) and abs(Fraction(end) - knob) <= abs(knob) * Fraction(slack):
            return None
    return knobs[0] < knob < knobs[1]


def on_grid(project, setting):
    step = project["setting"].get("step", "")
    return not step or (setting / Fraction(step)).denominator == 1


def inside(project, knobs, setting):
    """Whether a setting may be used: inside of the range and the controller's limits; None at a computed end."""
    return takes(project, setting) and surely(knobs, scale_knob(project, setting), allowed.COMPUTED_EDGE)


def grid_step(project, setting):
    """The controller's step, or that of the last digit."""
    text = project["setting"].get("step", "")
    if text:
        return Fraction(text)
    size = math.floor(math.log10(abs(float(setting)))) if setting else 0
    return Fraction(10) ** (size - END_DIGITS + 1)


def check_ends(case, knobs, ends, report):
    """Each end lies inside and on the grid, one step outward does not; a missing end has no setting of the grid inside."""
    settings = [scale_setting(case.project, Fraction(k)) if math.isfinite(k) else far_setting(case.project, k) for k in knobs]
    low, high = sorted(settings, key=lambda s: -math.inf if s is None else s) if None not in settings else settings
    for text, outward, end in ((ends[0], -1, low), (ends[1], 1, high)):
        what = f"permitted: {'smallest' if outward < 0 else 'largest'} setting"
        if text is None:
            if end is not None and math.isfinite(end) and low is not None and high is not None:
                step = grid_step(case.project, end)
                first = (math.floor(Fraction(end) / step) + (outward < 0) - 1) * step
                tried = [first + k * step for k in range(-2, 4)]
                free = [float(s) for s in tried if inside(case.project, knobs, s)]
                report.check(not free or end == 0, what, f"one of {free}", None)
            continue
        setting = Fraction(text)
        report.check(inside(case.project, knobs, setting) is not False, f"{what}: inside", knobs, text)
        report.check(on_grid(case.project, setting), f"{what}: on the grid", case.project["setting"], text)
        beyond = setting + outward * grid_step(case.project, end if end is not None and math.isfinite(end) and end else setting)
        outside = inside(case.project, knobs, beyond) is not True
        report.check(outside, f"{what}: outermost", f"{float(beyond)} outside", f"{text} in {knobs}")


def far_setting(project, knob):
    """The setting at an infinite knob."""
    if project["setting"].get("direction") == "reciprocal":
        return Fraction(0)
    return math.copysign(math.inf, knob * scale_knob(project, Fraction(1)))


def width(knobs):
    """The ratio of a range's ends as a logarithm; with a single limit as much as a ratio of 4, 6 dB to each side; endless without."""
    a, b = knobs
    if math.isfinite(a) and math.isfinite(b) and a * b > 0:
        return abs(math.log(b / a))
    unlimited = b == math.inf and a <= 0 or a == -math.inf and b == 0
    return math.inf if unlimited else math.log(4)


def two_sided(knobs):
    """Whether a range has two finite ends of one sign."""
    return all(map(math.isfinite, knobs)) and knobs[0] * knobs[1] > 0


def distance(knobs, knob):
    """The smaller logarithmic distance to the ends."""
    return min(abs(math.log(knob / end)) if math.isfinite(end) and end * knob > 0 else math.inf for end in knobs)


def check_suggestion(case, ranges, suggested, report):
    """Inside the widest range that holds a setting, on the grid, and no neighbour on the grid is farther from both ends."""
    if suggested is None:
        step = case.project["setting"].get("step", "")
        free = [k for k in ranges if not step and width(k) > 1e-4 or two_sided(k) and grid_settings(case.project, k)]
        report.check(not free, "suggestion", f"a setting in {free}", None)
        return
    setting = Fraction(suggested["setting"])
    knob = scale_knob(case.project, setting)
    off = abs(Fraction(suggested["knob"]) - knob)
    report.check(off <= abs(knob) * Fraction(1, 10**15), "suggestion: knob", float(knob), suggested["knob"])
    report.check(on_grid(case.project, setting), "suggestion: on the grid", case.project["setting"], suggested["setting"])
    holding = [k for k in ranges if inside(case.project, k, setting) is not False]
    if not report.check(bool(holding), "suggestion: inside", ranges, suggested):
        return
    wider = [k for k in ranges if width(k) > width(holding[0]) * (1 + 1e-9) and two_sided(k) and grid_settings(case.project, k)]
    report.check(not wider, "suggestion: in the widest range", wider, holding[0])
    step = case.project["setting"].get("step", "")
    if step and two_sided(holding[0]):
        here = distance(holding[0], float(knob))
        for other in (setting - Fraction(step), setting + Fraction(step)):
            if inside(case.project, holding[0], other):
                there = distance(holding[0], float(scale_knob(case.project, other)))
                words = f"{float(other)} is {there:.6g} from the ends of {holding[0]}", f"{suggested['setting']} is {here:.6g}"
                report.check(there <= here * (1 + 1e-9) + 1e-12, "suggestion: midway", *words)


def grid_settings(project, knobs):
    """Some settings of the grid surely inside of a range with finite ends of one sign."""
    ends = sorted(scale_setting(project, Fraction(k)) for k in knobs)
    if not project["setting"].get("step", ""):
        return [(ends[0] + ends[1]) / 2]
    step = Fraction(project["setting"]["step"])
    first = math.floor(ends[0] / step)
    return [s for k in range(4) if (s := (first + k) * step) < ends[1] and inside(project, knobs, s)]


def check_conflict(record, permitted, base, lanes, stable, report):
    """A conflict where nothing is permitted: its requirements exclude each other, and no fewer do."""
    conflict = record["permitted"]["conflict"]
    if permitted:
        report.equal("conflict", None, conflict)
        return
    if not report.check(conflict is not None and bool(conflict["text"]), "conflict", "present, with words", conflict):
        return
    kinds = [q["kind"] for q in record["requirements"]]
    if not conflict["requirements"]:
        report.equal("conflict: of stability and controller alone", [], base)
        return
    report.check(bool(base), "conflict: some setting is stable and in the controller's limits", base, conflict)
    chosen = [kinds.index(kind) for kind in conflict["requirements"]]
    report.equal("conflict: excludes", [], all_common(base, lanes, chosen))
    for size in range(1, len(chosen)):
        pool = range(len(lanes)) if len(chosen) <= 4 else chosen
        left = [[kinds[i] for i in some] for some in combinations(pool, size) if not all_common(base, lanes, some)]
        report.check(len(chosen) > 4 or not left, "conflict: no smaller set excludes", left, conflict["requirements"])


def all_common(base, lanes, chosen):
    for i in chosen:
        base = common(base, lanes[i])
    return base
