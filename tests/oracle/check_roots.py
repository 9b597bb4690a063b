"""Poles, zeros and closed-loop poles: every disc holds its true root, is small, and none is missing."""

from flint import acb, arb

import tolerances
from certified import is_real, kinds, precision, roots
from polynomials import rational

#: Bits of the true roots the discs are held against.
BITS = 160


def check_roots(case, record, report):
    """`poles`, `zeros` and `closedLoop` of the record."""
    loop = case.loop
    check_list("poles", loop.powers[0], record["poles"], report)
    check_list("zeros", loop.powers[1] if loop.affine else None, record["zeros"], report)
    closed = record["closedLoop"]
    if not report.check(closed is not None, "closed loop: at the setting", "present", closed):
        return
    setting = rational(case.setting)
    poly = loop.at(setting)
    report.equal("closed loop: knob", float(case.setting), closed["knob"])
    check_list("closed loop", poly, closed["poles"], report)
    found = kinds(poly)
    claimed = (closed["unstablePoles"], closed["axisPoles"], closed["name"])
    report.equal("closed loop: counts", (found.right, found.axis, found.name), claimed)


def check_list(what, poly, claimed, report):
    """A list of discs against the roots of a polynomial; None is an empty list."""
    true = [[ball, m] for ball, m in roots(poly, BITS)] if poly is not None else []
    report.equal(f"{what}: multiplicities sum to the degree", sum(m for _, m in true), sum(r["multiplicity"] for r in claimed))
    sizes = [abs(ball).mid() for ball, _ in true if not ball.contains(0)]
    smallest = float(min(sizes, default=arb(1)))
    for disc in claimed:
        check_disc(what, true, disc, smallest, report)
    left = [(ball.str(15), m) for ball, m in true if m]
    report.check(not left, f"{what}: true roots in no disc", [], left)


def check_disc(what, true, disc, smallest, report):
    """One disc takes its number of true roots out of the list."""
    wanted = disc["multiplicity"]
    where = f"{what}: disc at {disc['re']!r} {disc['im']!r}"
    inside = [entry for entry in true if entry[1] and holds(disc, entry[0])]
    inside.sort(key=lambda entry: (entry[1] != wanted, distance(disc, entry[0])))
    taken = 0
    for entry in inside:
        while entry[1] and taken < wanted and is_real(entry[0]) == (disc["im"] == 0):
            entry[1] -= 1
            taken += 1
    near = min((e[0] for e in true), key=lambda ball: distance(disc, ball), default=None)
    report.check(taken == wanted, f"{where} radius {disc['radius']:.3g} holds {wanted}", near and near.str(18), f"{taken} true roots")
    size = abs(complex(disc["re"], disc["im"])) or smallest
    allowed = (tolerances.RADIUS_SIMPLE if wanted == 1 else tolerances.RADIUS_MULTIPLE) * size
    report.check(disc["radius"] <= allowed, f"{where} is small", f"radius up to {allowed:.3g}", disc["radius"])


def distance(disc, ball):
    """Distance of centre and true root as a number to sort by."""
    with precision(BITS):
        return float(abs(ball - acb(disc["re"], disc["im"])).mid())


def holds(disc, ball):
    """True if the true root is surely inside the disc; a disc of radius zero must hit an exact root."""
    with precision(BITS):
        off = abs(ball - acb(disc["re"], disc["im"]))
        return bool(off <= arb(disc["radius"])) or (disc["radius"] == 0 and off.contains(0) and bool(off < arb(2) ** -(BITS // 2)))
