"""Shows that the checks can fail: a true record passes, and every corruption of it is caught by the check it is meant for."""

import copy
from decimal import Decimal

import numpy as np

import events
from binary import NoAnswer
from check_branches import Picture
from checks import check_record
from nasty import all_cases
from report import Report

#: Cases whose records are corrupted; together they have every kind of edge, landmark and branch.
SUBJECTS = ("triple real breakaway", "complex breakaway", "amplifier", "touching edge", "unstable pair, zeros near the axis")
#: Vertices from one end to the other of a chord that stands for a bent part.
COARSE = 6


def run(records):
    """(name, project, passed, failures) of all corruptions of all subjects."""
    report = Report()
    caught = {name: 0 for name in CORRUPTIONS}
    for case in (c for c in all_cases() if c.name in SUBJECTS):
        try:
            reply = records.ask(case.text)
        except NoAnswer as reason:
            report.check(False, f"self-test: answer to {case.name}", "a record", reason)
            continue
        if not report.check(reply["answer"]["record"] is not None, "self-test: record", case.name, reply["answer"]["problems"]):
            continue
        corrupt_all(case, events.events(case.loop), reply, caught, report)
    for name, times in caught.items():
        report.check(times > 0, f"self-test: {name}", "possible in at least one record", "in none")
    return "self-test", "corrupted records", report.passed, report.failures


def corrupt_all(case, truth, reply, caught, report):
    """Every corruption of one record."""
    clean = Report()
    check_record(case, truth, reply["answer"]["record"], reply["branches"], clean)
    report.check(not clean.failures, f"self-test: the true record of {case.name}", "no failure", clean.failures[:3])
    for name, (expected, corrupt) in CORRUPTIONS.items():
        spoiled = copy.deepcopy(reply)
        if corrupt(spoiled["answer"]["record"], spoiled["branches"]) is False:
            continue
        caught[name] += 1
        found = Report()
        check_record(case, truth, spoiled["answer"]["record"], spoiled["branches"], found)
        hit = [what for what, _, _ in found.failures if what.startswith(expected)]
        report.check(bool(hit), f"self-test: {name} in {case.name}", f"a failure of {expected}", [f[0] for f in found.failures])


# Each corruption changes a record in place; False where the record has nothing of the kind.


def inner_ends(ranges):
    """The two copies of every edge."""
    return [(left, right) for left, right in zip(ranges, ranges[1:]) if left["to"]["value"] != 0]


def shift_edge(part):
    def corrupt(record, branches):
        for left, right in inner_ends(record[part])[:1]:
            for edge in (left["to"], right["from"]):
                edge["bracket"] = [str(Decimal(t) * Decimal("1.0000000001")) for t in edge["bracket"]]
                edge["value"] *= 1.0000000001
                edge["exact"] = None
        return bool(inner_ends(record[part]))

    return corrupt


def remove_edge(part):
    def corrupt(record, branches):
        ranges = record[part]
        if len(ranges) < 2:
            return False
        ranges[0]["to"] = ranges[1]["to"]
        del ranges[1]

    return corrupt


def change_range(part, key, change):
    def corrupt(record, branches):
        record[part][-1][key] = change(record[part][-1][key])

    return corrupt


def change_edge(key, change):
    def corrupt(record, branches):
        ends = inner_ends(record["stability"])
        usable = [(left, right) for left, right in ends if change(copy.deepcopy(left["to"][key])) is not None]
        if not usable:
            return False
        for edge in (usable[0][0]["to"], usable[0][1]["from"]):
            edge[key] = change(edge[key])

    return corrupt


def widen(bracket):
    low, high = (Decimal(t) for t in bracket)
    return [str(low - abs(low) * Decimal("1e-14")), str(high)]


def remove_landmark(kind):
    """Removes those a record must list: no crossing at zero gain, no direction along the real axis."""

    def optional(mark):
        along_axis = mark["angle"] is not None and mark["s"]["im"] == 0 and mark["multiplicity"] == 1
        return along_axis or mark["angle"] is None and mark["knob"] == 0

    def corrupt(record, branches):
        kept = [m for m in record["landmarks"] if m["kind"] != kind or optional(m)]
        fewer = len(kept) < len(record["landmarks"])
        record["landmarks"] = kept
        return fewer

    return corrupt


def change_landmark(key, change):
    def corrupt(record, branches):
        mark = next((m for m in record["landmarks"] if m[key] is not None and change(m[key]) != m[key] and m["s"]["im"] != 0), None)
        if mark is None:
            return False
        mark[key] = change(mark[key])

    return corrupt


def false_breakaway(record, branches):
    """A root of dK/ds = 0 at which the knob would be complex."""
    mark = {"kind": "breakaway", "s": {"re": -1.5, "im": 0.5}, "knob": 2.0, "multiplicity": 2, "angle": None, "sign": "positive"}
    record["landmarks"].append(mark)


def change_disc(part, change):
    def corrupt(record, branches):
        discs = record["closedLoop"]["poles"] if part == "closedLoop" else record[part]
        if not discs:
            return False
        change(discs[0])

    return corrupt


def long_branches(branches):
    """Indices of two branches of one sign that can be cut at one knob."""
    for i, a in enumerate(branches):
        for k in range(i):
            b = branches[k]
            if a["sign"] == b["sign"] and min(len(a["points"]), len(b["points"])) > 6 and distant(a, b):
                return i, k
    return None


def distant(a, b):
    """True if the branches are apart in the middle, and neither is the mirror image of the other."""
    first, second = a["points"][len(a["points"]) // 2], b["points"][len(b["points"]) // 2]
    return abs(complex(*first[:2]) - complex(*second[:2])) > 1e-3 * abs(complex(*first[:2]))


def swap_branches(record, branches):
    """The later halves of two branches exchanged, as a bad matching does."""
    pair = long_branches(branches)
    if pair is None:
        return False
    a, b = (branches[i]["points"] for i in pair)
    cut = abs(a[len(a) // 2][2])
    heads = [[p for p in c if p[2] is not None and abs(p[2]) <= cut] for c in (a, b)]
    tails = [[p for p in c if p[2] is None or abs(p[2]) > cut] for c in (a, b)]
    if not tails[0] or not tails[1]:
        return False
    branches[pair[0]]["points"], branches[pair[1]]["points"] = heads[0] + tails[1], heads[1] + tails[0]


def leave_out_half(record, branches):
    text = "the branches of the negative half of the locus could not be followed with certainty and are not drawn"
    record["notices"].append({"kind": "not-computed", "text": text})
    branches[:] = [b for b in branches if b["sign"] == "positive"]


def same_branch_twice(record, branches):
    branches[1]["points"] = copy.deepcopy(branches[0]["points"])
    branches[1]["sign"] = branches[0]["sign"]
    return len(branches) > 1 and len(branches[0]["points"]) > 2


def move_vertex(record, branches):
    points = max((b["points"] for b in branches), key=len)
    points[len(points) // 2][0] += 1e-6 * (record["view"]["re"][1] - record["view"]["re"][0])


def coarse_branch(record, branches):
    """Vertices left out where the branch is bent most."""
    picture = Picture(record["view"])
    worst = max((bend(picture, b["points"], i), k, i) for k, b in enumerate(branches) for i in range(len(b["points"]) - COARSE))
    if worst[0] < 1:
        return False
    del branches[worst[1]]["points"][worst[2] + 1 : worst[2] + COARSE]


def bend(picture, points, i):
    """Pixels between the vertices that would be left out and the chord that would stand for them."""
    if any(part is None for point in points[i : i + COARSE + 1] for part in point):
        return 0.0
    s = np.array([complex(*point[:2]) for point in points[i : i + COARSE + 1]])
    return float(picture.pixels_to_chord(s[1:-1], s[0], s[-1]).max()) if picture.shows(s).all() else 0.0


def cut_branch(record, branches):
    """The end of a branch left out."""
    longest = max(branches, key=lambda b: len(b["points"]))
    longest["points"] = longest["points"][: len(longest["points"]) // 3]


def other_coefficient(record, branches):
    row = record["model"]["coefficients"][0]
    row[0] = str(int(row[0]) + 1)


def drop_angle(record, branches):
    angles = record["asymptotes"]["positive"]["angles"]
    return bool(angles) and angles.pop() is not None


def drop_segment(record, branches):
    for half in ("positive", "negative"):
        if record["realAxis"][half]:
            record["realAxis"][half].pop()
            return True
    return False


def plus_one(n):
    return n + 1


CORRUPTIONS = {
    "edge shifted": ("stability: edge", shift_edge("stability")),
    "edge removed": ("stability: edge missed", remove_edge("stability")),
    "count of unstable poles wrong": ("stability: counts", change_range("stability", "unstablePoles", plus_one)),
    "count of axis poles wrong": ("stability: counts", change_range("stability", "axisPoles", plus_one)),
    "bracket too wide": ("stability: bracket", change_edge("bracket", widen)),
    "omega wrong": ("stability: edge", change_edge("omegas", lambda listed: [w * 1.00000001 for w in listed] or None)),
    "kind wrong": ("stability: edge", change_edge("kind", lambda kind: "repeated pole")),
    "touching flag wrong": ("stability: touching", change_edge("touching", lambda flag: not flag)),
    "count at the edge wrong": ("stability: edge", change_edge("unstablePoles", plus_one)),
    "exact value wrong": ("stability: bracket", change_edge("exact", lambda text: text and text + "1")),
    "not proven": ("stability: bracket", change_edge("proven", lambda flag: False)),
    "character edge shifted": ("character: edge", shift_edge("character")),
    "character edge removed": ("character: edge missed", remove_edge("character")),
    "real poles wrong": ("character: kinds", change_range("character", "realPoles", plus_one)),
    "word wrong": ("character: kinds", change_range("character", "name", lambda name: "critically damped")),
    "breakaway missing": ("landmark missing", remove_landmark("breakaway")),
    "departure missing": ("landmark missing", remove_landmark("departure")),
    "arrival missing": ("landmark missing", remove_landmark("arrival")),
    "axis crossing missing": ("landmark missing", remove_landmark("axis crossing")),
    "origin crossing missing": ("landmark missing", remove_landmark("origin crossing")),
    "false breakaway": ("landmark that is none", false_breakaway),
    "angle wrong": ("landmark", change_landmark("angle", lambda angle: angle * 0.9999)),
    "knob of a landmark wrong": ("landmark", change_landmark("knob", lambda knob: knob * 1.00000001)),
    "multiplicity of a landmark wrong": ("landmark", change_landmark("multiplicity", lambda m: m + 1)),
    "asymptote missing": ("asymptotes", drop_angle),
    "segment missing": ("real axis", drop_segment),
    "radius too small": ("poles: disc", change_disc("poles", lambda disc: disc.update(re=disc["re"] + 1e-9, radius=1e-13))),
    "radius too large": ("poles: disc", change_disc("poles", lambda disc: disc.update(radius=1e-6))),
    "zero moved": ("zeros: disc", change_disc("zeros", lambda disc: disc.update(im=disc["im"] + 1e-9))),
    "multiplicity wrong": ("closed loop", change_disc("closedLoop", lambda disc: disc.update(multiplicity=disc["multiplicity"] + 1))),
    "coefficient wrong": ("model", other_coefficient),
    "branches swapped": ("branches", swap_branches),
    "one branch twice": ("branches", same_branch_twice),
    "branch missing": ("branches", lambda record, branches: branches.pop() is not None),
    "half left out, said": ("branches: both halves drawn", leave_out_half),
    "half left out, branches": ("branches negative: number", leave_out_half),
    "vertex off the locus": ("branches", move_vertex),
    "polyline too coarse": ("branches", coarse_branch),
    "branch cut short": ("branches", cut_branch),
}
