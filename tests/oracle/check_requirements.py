"""The ranges of every requirement: nothing missed, nothing too much, edges where the figure meets its limit."""

import math
from fractions import Fraction

import response_tolerances as allowed
from figures import PROVEN, STATIC, meets
from knobs import scale_setting, sampled_knobs

#: A sample this near to an edge, relative, is left out.
NEAR_EDGE = 1e-5


def check_requirements(case, loops, record, report):
    """`requirements` of the record; `loops` gives the loop at a knob value."""
    knobs = sampled_knobs(record)
    affine = record["model"]["knobDegree"] <= 1
    for typed, found in zip(case.project["requirements"], record["requirements"]):
        kind, limit = typed["kind"], typed["limit"]
        check_order(kind, found["ranges"], report)
        # On the ray of damping ratio 1/2 poles may stay at every knob; such a loop is computed.
        if kind in STATIC or kind in PROVEN and affine and not (kind == "damping-ratio" and Fraction(limit) == Fraction(1, 2)):
            report.check(found["proven"], f"ranges: {kind} proven", True, found["proven"])
        if not found["ranges"]:
            report.check(bool(found["remark"]), f"ranges: {kind} remark", "words", found["remark"])
        for edge, inside in edges(found["ranges"]):
            check_edge(case, loops, kind, limit, edge, inside, found["ranges"], report)
        check_membership(loops, kind, limit, found["ranges"], knobs, report)


def edges(ranges):
    """Every edge with the side on which the range lies: +1 above it, −1 below."""
    return [(r[end], side) for r in ranges for end, side in (("from", 1), ("to", -1)) if r[end]]


def check_order(kind, ranges, report):
    """Ascending and apart."""
    ends = [(r[end]["knob"] if r[end] else open_end) for r in ranges for end, open_end in (("from", -math.inf), ("to", math.inf))]
    report.check(ends == sorted(ends), f"ranges: {kind} order", sorted(ends), ends)


def check_edge(case, loops, kind, limit, edge, inside, ranges, report):
    """Just inside the limit is met, just outside it is not or the loop is unstable; bracket and setting belong to the knob."""
    value = Fraction(edge["knob"])
    what = f"edge: {kind} {edge['cause'].get('requirement', 'stability')} at {edge['knob']!r}"
    low, high = (Fraction(t) for t in edge["bracket"])
    apart = allowed.PROVEN_EDGE if edge["proven"] else allowed.COMPUTED_EDGE
    rounding = abs(value) * Fraction(1, 10**15)
    report.check(low <= high and low - rounding <= value <= high + rounding, f"{what}: bracket", edge["knob"], edge["bracket"])
    report.check(float(high - low) <= apart * abs(edge["knob"]), f"{what}: bracket width", apart, float(high - low))
    setting = scale_setting(case.project, value)
    if edge["setting"] is None or setting is None:
        report.check(edge["setting"] is None and setting is None, f"{what}: setting", setting, edge["setting"])
    else:
        off = abs(Fraction(edge["setting"]) - setting)
        report.check(off <= abs(setting) * Fraction(allowed.SCALE), f"{what}: setting", float(setting), edge["setting"])
    ends = [e["knob"] for e, _ in edges(ranges) if e is not edge]
    step = Fraction(apart) * abs(value) if value else Fraction(apart) * min((abs(Fraction(e)) for e in ends if e), default=1)
    if any(abs(Fraction(e) - value) < 3 * step for e in ends):
        return
    by_stability = edge["cause"]["kind"] == "stability"
    within, beyond = loops(value + inside * step), loops(value - inside * step)
    # At a stability edge figures run into limits of their own (an infinite settling time), judged by the membership samples.
    if by_stability:
        report.equal(f"{what}: inside stable", True, within.stable)
        report.equal(f"{what}: outside unstable or marginal", True, not beyond.stable or not loops(value).stable)
    else:
        undecided = 0.0 if edge["proven"] else allowed.UNDECIDED
        report.check(meets(within, kind, limit, undecided) is not False, f"{what}: inside", "met", "not met")
        report.check(meets(beyond, kind, limit, undecided) is not True, f"{what}: outside", "not met", "met")


def check_membership(loops, kind, limit, ranges, knobs, report):
    """The independent verdict at many knob values equals membership."""
    ends = [e["knob"] for e, _ in edges(ranges)]
    wrong = []
    for knob in knobs:
        if any(abs(knob - end) <= NEAR_EDGE * abs(end) for end in ends):
            continue
        verdict = meets(loops(Fraction(knob)), kind, limit, allowed.UNDECIDED)
        if verdict is not None and verdict != holds(ranges, knob):
            wrong.append((knob, verdict))
    claimed = [[r[end] and r[end]["knob"] for end in ("from", "to")] for r in ranges]
    report.check(not wrong, f"ranges: {kind} at {limit}", f"(knob, met) {wrong[:3]} of {len(wrong)}", claimed)


def holds(ranges, knob):
    """Whether a knob value lies in one of the ranges."""
    return any((not r["from"] or r["from"]["knob"] < knob) and (not r["to"] or knob < r["to"]["knob"]) for r in ranges)
