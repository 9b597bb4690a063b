"""Landmarks, asymptotes and real-axis segments: all there, none extra, each in its place."""

from flint import arb, acb

import tolerances
from certified import is_real, precision, roots
from events import EVENT_BITS, acb_value
from landmarks import marks, wrap


def check_landmarks(case, truth, record, report):
    """`record.landmarks` one to one against the true ones."""
    left = list(record["landmarks"])
    expected = marks(case.loop, truth)
    reach = max(*map(abs, record["view"]["re"]), *map(abs, record["view"]["im"]))
    for mark in sorted(expected, key=lambda m: not m.required):
        found = next((claim for claim in left if agrees(mark, claim, reach)), None)
        if found is not None:
            left.remove(found)
            report.passed += 1
        elif mark.required:
            report.check(False, "landmark missing", describe(mark), nearest(mark, record["landmarks"]))
    for claim in left:
        report.check(False, "landmark that is none", "not in the list", claim)


def agrees(mark, claim, reach):
    """True if a record's landmark is this one."""
    if claim["kind"] not in mark.kinds or claim["sign"] not in mark.signs or claim["multiplicity"] not in mark.multiplicities:
        return False
    with precision(EVENT_BITS):
        off = abs(mark.place - acb(claim["s"]["re"], claim["s"]["im"]))
        size = abs(mark.place) if not mark.place.contains(0) else arb(reach) * arb(2) ** -50
        if not off <= size * arb(tolerances.LANDMARK_PLACE):
            return False
        if (mark.knob is None) != (claim["knob"] is None):
            return False
        if mark.knob is not None:
            size = abs(mark.knob)
            if not (mark.knob - arb(claim["knob"])).contains(0) and not abs(mark.knob - arb(claim["knob"])) <= size * arb(tolerances.LANDMARK_KNOB):
                return False
    if mark.angle is None:
        return claim["angle"] is None
    if claim["angle"] is None or not -180 < claim["angle"] <= 180:
        return False
    return abs(wrap(mark.angle - claim["angle"])) <= tolerances.ANGLE + tolerances.ANGLE_ROUNDINGS * mark.vague


def describe(mark):
    """A mark in words."""
    knob = "infinity" if mark.knob is None else mark.knob.str(15, radius=False)
    place = mark.place.str(15, radius=False)
    return f"{sorted(mark.kinds)} at {place}, knob {knob}, {sorted(mark.multiplicities)} poles, angle {mark.angle}, {sorted(mark.signs)}"


def nearest(mark, claims):
    """The claims of the same kind, nearest first, to show beside a missing one."""
    same = [c for c in claims if c["kind"] in mark.kinds]
    same.sort(key=lambda c: float(abs(mark.place - acb(c["s"]["re"], c["s"]["im"])).mid()))
    return same[:3]


def check_asymptotes(case, record, report):
    """Count, centroid and angles of both halves, from the two leading coefficients of D and N."""
    claimed = record["asymptotes"]
    if not case.loop.affine:
        report.equal("asymptotes: none unless affine", None, claimed)
        return
    if not report.check(claimed is not None, "asymptotes", "present", claimed):
        return
    d, n = case.loop.moving
    excess = d.degree() - n.degree()
    for sign, half in ((1, "positive"), (-1, "negative")):
        found = claimed[half]
        # With more zeros than poles the branches come from infinity at zero gain, along the same kind of lines.
        report.equal(f"asymptotes {half}: count", abs(excess), found["count"])
        if excess == 0:
            report.check(found["angles"] == [] and found["centroid"] is None, f"asymptotes {half}: none", [], found)
            continue
        upright = sign * int(d.leading_coefficient()) * int(n.leading_coefficient()) > 0
        angles = sorted(wrap((180 * (2 * k + upright)) / abs(excess)) for k in range(abs(excess)))
        good = len(angles) == len(found["angles"]) and all(abs(a - b) <= tolerances.ANGLE for a, b in zip(angles, found["angles"]))
        report.check(good, f"asymptotes {half}: angles", angles, found["angles"])
        check_centroid(half, d, n, excess, found["centroid"], report)


def check_centroid(half, d, n, excess, found, report):
    """(sum of poles − sum of zeros) / excess."""
    poles = -int(d[d.degree() - 1]) / int(d.leading_coefficient())
    zeros = -int(n[n.degree() - 1]) / int(n.leading_coefficient()) if n.degree() else 0.0
    centroid = (poles - zeros) / excess
    size = max((float(abs(ball).mid()) for p in (d, n) for ball, _ in roots(p)), default=0.0)
    good = found is not None and abs(found - centroid) <= tolerances.CENTROID * size * (d.degree() + n.degree())
    report.check(good, f"asymptotes {half}: centroid", centroid, found)


def check_real_axis(case, record, report):
    """The segments: where −D/N has the sign of the knob, between real poles and zeros."""
    claimed = record["realAxis"]
    if not case.loop.affine:
        report.equal("real axis: none unless affine", None, claimed)
        return
    if not report.check(claimed is not None, "real axis", "present", claimed):
        return
    with precision(EVENT_BITS):
        for sign, half in ((1, "positive"), (-1, "negative")):
            check_segments(half, segments(case.loop, sign), claimed[half], report)


def segments(loop, sign):
    """The parts of the real axis on the locus, neighbours joined."""
    d, n = loop.moving
    bounds = sorted((ball.real for p in (d, n) for ball, _ in roots(p, EVENT_BITS) if is_real(ball)), key=lambda b: b.mid())
    ends = [None] + bounds + [None]
    joined = []
    for low, high in zip(ends, ends[1:]):
        inside = middle(low, high)
        if acb_value(d, acb(inside)).real * acb_value(n, acb(inside)).real * sign < 0:
            if joined and joined[-1][1] is low and low is not None:
                joined[-1] = (joined[-1][0], high)
            else:
                joined.append((low, high))
    return joined


def middle(low, high):
    """A point of an interval that may be open."""
    if low is None and high is None:
        return arb(0)
    if low is None:
        return high.mid() - abs(high.mid()) - 1
    if high is None:
        return low.mid() + abs(low.mid()) + 1
    return ((low + high) / 2).mid()


def check_segments(half, expected, claimed, report):
    """Segments of a record against the true ones; a gap that f64 cannot show may be there or not."""
    shown = joined([tuple(e and float(e.mid()) for e in pair) for pair in expected])
    found = joined(claimed)
    good = len(shown) == len(found) and all(same_end(a, b) for e, c in zip(shown, found) for a, b in zip(e, c))
    report.check(good, f"real axis {half}: segments", shown, claimed)


def joined(segments):
    """Segments with neighbours that touch made one, and none of no length."""
    found = []
    for low, high in segments:
        if low is not None and high is not None and same_end(low, high):
            continue
        if found and found[-1][1] is not None and low is not None and same_end(found[-1][1], low):
            found[-1] = (found[-1][0], high)
        else:
            found.append((low, high))
    return found


def same_end(true, claimed):
    """Two ends agree; None is infinity."""
    if true is None or claimed is None:
        return true is None and claimed is None
    return abs(true - claimed) <= abs(true) * tolerances.LANDMARK_PLACE
