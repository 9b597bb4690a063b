"""The derivation for a check by hand, worked through as an engineer would: every formula is evaluated in exact rationals or complex
numbers and held against the loop and against the ranges it must lead to."""

import cmath
import math
from fractions import Fraction

from flint import fmpz_poly

from notation import evaluate
from polynomials import at_knob, rational

#: Of a formula that must vanish, relative to the sum of the sizes of its terms: f64 arguments leave some 1e-13, a factor for the
#: degree of up to 20.
VANISHING = Fraction(1, 10**11)
#: Degrees; angles are sums of arguments of differences.
ANGLE = 1e-6
#: Figures that jump where a crossing or a peak comes or goes: at an edge they need not be at the limit.
JUMPING = {"rise-time", "settling-time-2", "settling-time-5", "peak-time", "delay-margin", "phase-margin", "bandwidth", "gain-margin-up", "gain-margin-down"}
#: Knob values that stand for "any".
ANY_KNOB = (Fraction(37, 11), Fraction(-5, 7))


def check_derivation(case, record, report):
    """Every part of `sheet.derivation`."""
    derivation = record["sheet"]["derivation"]
    check_model(case, derivation, report)
    check_arrays(case, derivation, report)
    check_conditions(case, record, derivation, report)
    check_axis(case, record, derivation, report)
    check_samples(case, record, derivation, report)
    check_asymptotes(case, derivation, report)
    check_breakaway(case, record, derivation, report)
    check_directions(case, derivation, report)
    check_requirements(record, derivation, report)


def check_model(case, derivation, report):
    """moving · fixed is F, up to one factor."""
    ratios = []
    for k, q in enumerate(ANY_KNOB):
        s = Fraction(3 + k, 7)
        values = {"s": s, "K": q}
        claimed = evaluate(derivation["moving"]["text"], values)
        if derivation["fixed"]:
            claimed *= evaluate(derivation["fixed"]["text"], values)
        true = sum(horner(power, s) * q**k for k, power in enumerate(case.loop.powers))
        ratios.append(claimed / true)
    report.check(len(set(ratios)) == 1, "derivation: F", "one ratio", ratios)


def horner(p, s):
    """p(s) of an integer polynomial."""
    value = Fraction(0)
    for i in range(p.degree(), -1, -1):
        value = value * s + int(p[i])
    return value


def own_array(coefficients):
    """The Routh array of coefficients, highest power first, and the powers of its zero rows; it ends at a zero first element."""
    degree = len(coefficients) - 1
    rows, zero_rows = [coefficients[::2]], []
    for power in range(degree - 1, -1, -1):
        if power == degree - 1:
            row = coefficients[1::2]
        else:
            upper, above = rows[-2], rows[-1]
            at = lambda r, j: r[j] if j < len(r) else Fraction(0)
            row = [at(upper, j + 1) - upper[0] * at(above, j + 1) / above[0] for j in range(power // 2 + 1)]
        if not any(row):
            zero_rows.append(power)
            row = [c * (power + 1 - 2 * j) for j, c in enumerate(rows[-1])][: power // 2 + 1]
        rows.append(row)
        if row[0] == 0:
            break
    return rows, zero_rows


def falling(p, a=None):
    """Coefficients, highest power first, of p or of (s + a)·p."""
    p = p * fmpz_poly([a, 1]) if a is not None else p
    return [Fraction(int(p[i])) for i in range(p.degree(), -1, -1)]


def check_arrays(case, derivation, report):
    """The elements at any knob are those of the array worked out from numbers."""
    for table in derivation["routh"]:
        for q in ANY_KNOB:
            p = at_knob(case.loop.moving, rational(q))
            own, _ = own_array(falling(p, table["addedPole"]))
            claimed = [[evaluate(element["text"], {"K": q}) for element in row["elements"]] for row in table["rows"]]
            scale = claimed[0][0] / own[0][0]
            # At the very numbers tried an element may be zero by chance: then the own array ends earlier.
            for mine, theirs in zip(own, claimed):
                report.check([c * scale for c in mine] == theirs, f"array: row of {len(own) - 1}", mine, theirs)
        specials = [row["special"]["kind"] for row in table["rows"] if row["special"]]
        report.check(all(kind in ("zero-row", "zero-first-element") for kind in specials), "array: special cases", "by name", specials)
    if not derivation["routh"]:
        report.check(bool(derivation["routhRemark"]), "array: remark", "why there is none", derivation["routhRemark"])


def check_conditions(case, record, derivation, report):
    """The kept solutions are the edges; each solution is a root between two close numbers."""
    kept = set()
    for condition in derivation["conditions"]:
        text = condition["equation"]["text"]
        for candidate in condition["candidates"]:
            knob = candidate["knob"]
            report.check(vanishes(text, {"K": Fraction(knob)}), f"condition {condition['kind']}: {knob}", "a root", text[:200])
            if candidate["kept"]:
                kept.add(knob)
    edges = [edge["value"] for edge in derivation["edges"]]
    report.equal("derivation: edges", [r["to"]["value"] for r in record["stability"][:-1]], edges)
    if derivation["conditions"]:
        near = lambda e: any(abs(e - k) <= 1e-14 * abs(e) for k in kept)
        report.check(all(near(e) for e in edges), "derivation: every edge solves a condition", edges, sorted(kept))


def vanishes(text, values):
    """Whether a sum is zero but for the rounding of its arguments."""
    value = evaluate(text, values)
    sizes = {name: abs(v) for name, v in values.items()}
    whole = evaluate(text.replace("-", "+").lstrip("+ ").replace("(+", "("), sizes)
    return abs(value) <= VANISHING * abs(whole)


def check_axis(case, record, derivation, report):
    """At every kept ω and knob real and imaginary part vanish; every crossing of the record is there."""
    axis = derivation["axis"]
    if axis is None:
        return
    x = axis["variable"]
    omegas = sorted(edge["omega"] for edge in derivation["edges"] if edge["kind"] == "axis crossing" and edge["value"])
    if axis["eliminated"] is None:
        return
    found = []
    for candidate in axis["candidates"]:
        omega = candidate["s"]["im"]
        square = Fraction(omega) ** 2 if candidate["s"]["re"] == 0 else -(Fraction(candidate["s"]["re"]) ** 2)
        report.check(vanishes(axis["eliminated"]["text"], {x: square}), f"axis: root {float(square)}", 0, axis["eliminated"]["text"][:200])
        if not candidate["kept"]:
            report.check(bool(candidate["reason"]), "axis: reason", "words", candidate["reason"])
            continue
        found.append(omega)
        for part in ("even", "odd"):
            values = {x: square, "K": Fraction(candidate["knob"])}
            report.check(vanishes(axis[part]["text"], values), f"axis: {part} part at {omega}", 0, axis[part]["text"][:200])
    missing = [w for w in omegas if not any(abs(w - f) <= 1e-9 * w for f in found)]
    report.check(not missing, "axis: every crossing", omegas, found)


def check_samples(case, record, derivation, report):
    """One number in every range, whose array counts what the range claims."""
    ranges = record["stability"]
    report.equal("ranges: number", len(ranges), len(derivation["ranges"]))
    for claimed, told in zip(ranges, derivation["ranges"]):
        sample = Fraction(told["sample"])
        low, high = (claimed[end] and Fraction(claimed[end]["value"]) for end in ("from", "to"))
        inside = (low is None or low < sample) and (high is None or sample < high)
        report.check(inside, "ranges: sample", (low, high), told["sample"])
        report.equal("ranges: claim", claimed["unstablePoles"], told["unstablePoles"])
        if told["changes"] is None:
            continue
        report.equal(f"ranges: changes at {sample}", claimed["unstablePoles"], told["changes"] + told["fixedUnstable"])
        own, zero_rows = own_array(falling(at_knob(case.loop.moving, rational(sample)), told["addedPole"]))
        column = [row[0] for row in own]
        signs = sum(a * b < 0 for a, b in zip(column, column[1:]))
        report.equal(f"ranges: own array at {sample}", signs, told["changes"])
        report.equal(f"ranges: zero rows at {sample}", zero_rows, told["zeroRows"])
        scale = Fraction(told["firstColumn"][0]) / column[0]
        same = all(abs(Fraction(t) - c * scale) <= Fraction(2, 10**5) * abs(c * scale) for t, c in zip(told["firstColumn"], column))
        report.check(same, f"ranges: column at {sample}", [float(c * scale) for c in column], told["firstColumn"])


def check_asymptotes(case, derivation, report):
    """Sums of poles and zeros, and the centroid, exactly."""
    found = derivation["asymptotes"]
    if found is None:
        return
    d, n = case.loop.moving
    root_sum = lambda p: Fraction(-int(p[p.degree() - 1]), int(p[p.degree()])) if p.degree() > 0 else Fraction(0)
    report.equal("asymptotes: counts", [d.degree(), n.degree()], found["counts"])
    report.equal("asymptotes: sums", [root_sum(d), root_sum(n)], [Fraction(t) for t in found["sums"]])
    count = abs(d.degree() - n.degree())
    difference = root_sum(d) - root_sum(n)
    centroid = (difference if d.degree() >= n.degree() else -difference) / count if count else None
    report.equal("asymptotes: centroid", centroid, found["centroid"] and Fraction(found["centroid"]))


def check_breakaway(case, record, derivation, report):
    """The kept roots are the landmarks; the others have a knob that is not real, or are roots of D or N."""
    found = derivation["breakaway"]
    if found is None:
        return
    marks = [mark for mark in record["landmarks"] if mark["kind"] in ("breakaway", "break-in")]
    kept = [c for c in found["candidates"] if c["kept"]]
    report.equal("breakaway: kept", len(marks), len(kept))
    if found["discriminant"]:
        for c in kept:
            good = vanishes(found["equation"]["text"], {"K": Fraction(c["knob"])})
            report.check(good, f"breakaway: discriminant at {c['knob']}", 0, found["equation"]["text"][:200])
        return
    degree = sum(c["multiplicity"] * (1 if c["s"]["im"] == 0 else 2) for c in found["candidates"])
    d, n = case.loop.moving
    report.equal("breakaway: roots", (d.derivative() * n - d * n.derivative()).degree(), degree)
    for c in found["candidates"]:
        s = complex(c["s"]["re"], c["s"]["im"])
        if c["multiplicity"] == 1:
            good = complex_vanishes(d.derivative() * n - d * n.derivative(), s)
            report.check(good, f"breakaway: root {s}", 0, found["equation"]["text"][:200])


def complex_vanishes(p, s):
    """p(s) against the sum of the sizes of its terms."""
    unit = abs(s) or 1.0
    # Scaled, so that no power overflows.
    exact = [int(p[i]) * Fraction(unit) ** i for i in range(p.degree() + 1)]
    largest = max(abs(term) for term in exact)
    terms = [float(term / largest) for term in exact]
    z = s / unit
    value = sum(t * z**i for i, t in enumerate(terms))
    return abs(value) <= float(VANISHING) * sum(abs(t) for t in terms)


def check_directions(case, derivation, report):
    """180° more or less the sum of the angles, over the multiplicity."""
    if not derivation["directions"]:
        return
    d, n = case.loop.moving
    leading = 1 if int(d[d.degree()]) * int(n[n.degree()]) > 0 else -1
    for step in derivation["directions"]:
        own_is_pole = step["kind"] == "departure"
        for term in step["terms"]:
            there = complex(step["s"]["re"] - term["s"]["re"], step["s"]["im"] - term["s"]["im"])
            angle = math.degrees(cmath.phase(there))
            report.check(abs(angle - term["angle"]) < ANGLE, f"direction at {step['s']}: term", angle, term)
        turn = sum(t["multiplicity"] * t["angle"] * (-1 if t["pole"] == own_is_pole else 1) for t in step["terms"])
        for sign, angles in ((1, step["angles"]["positive"]), (-1, step["angles"]["negative"])):
            first = turn + (180 if leading * sign > 0 else 0)
            report.equal(f"direction at {step['s']}: number", step["multiplicity"], len(angles))
            for angle in angles:
                off = (step["multiplicity"] * angle - first) % 360
                report.check(min(off, 360 - off) < ANGLE, f"direction at {step['s']}", first, angles)


def check_requirements(record, derivation, report):
    """Every edge that a requirement sets stands under it, with the limit met there."""
    for judged, step in zip(record["requirements"], derivation["requirements"]):
        kind = judged["kind"]
        report.equal("requirement: kind", kind, step["kind"])
        ends = [r[end] for r in judged["ranges"] for end in ("from", "to") if r[end]]
        own = [e["knob"] for e in ends if e["cause"].get("requirement") == kind]
        report.equal(f"requirement {kind}: edges", own, [edge["knob"] for edge in step["edges"]])
        report.check(bool(step["condition"]), f"requirement {kind}: words", "words", step["condition"])
        for edge in step["edges"]:
            if edge["figure"] is not None and kind not in JUMPING:
                off = abs(edge["figure"] - judged["limit"])
                report.check(off <= 1e-5 * max(abs(judged["limit"]), 1), f"requirement {kind}: figure at its edge", judged["limit"], edge)
