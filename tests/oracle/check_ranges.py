"""Stability and character: the ranges partition the real line, every edge is a true one, none is missing, every count is right.

The counts are recounted with certified roots at exact rational samples: the middle of each range, close to both ends, far out, and
on both sides of every true event.
"""

from decimal import Decimal
from fractions import Fraction

from flint import arb, fmpq

import certified
import tolerances
from certified import precision
from events import EVENT_BITS, exact
from polynomials import rational
from tracking import float_of

NEAR = rational(tolerances.NEAR_EDGE)
#: How far out an open end is sampled, relative to the last edge.
FAR = [rational("1.5"), rational("1000"), rational("1e12")]


class Recount:
    """The kinds of poles at exact values of the knob, each counted once."""

    def __init__(self, loop):
        self.loop = loop
        self.known = {}

    def at(self, value):
        if value not in self.known:
            self.known[value] = certified.kinds(self.loop.at(value))
        return self.known[value]


def exact_text(text):
    """A rational from "12", "-2/15" or a decimal with exponent."""
    return rational(Fraction(text) if "/" in text else Fraction(Decimal(text)))


def check_stability(recount, truth, record, report):
    """`record.stability` against the events and certified counts."""
    ranges = record["stability"]
    check_partition("stability", ranges, report)
    check_edges("stability", ranges, [e for e in truth if e.on_axis], lambda event: True, report)
    for r in ranges:
        for value in samples(r):
            kinds = recount.at(value)
            found = (r["unstablePoles"], r["axisPoles"], r["stable"])
            report.equal(f"stability: counts at {value}", (kinds.right, kinds.axis, kinds.right == kinds.axis == 0), found)
    for left, right in zip(ranges, ranges[1:]):
        if edge := left["to"]:
            same = left["unstablePoles"] == right["unstablePoles"]
            report.equal(f"stability: touching at {edge['value']}", same, edge["touching"])


def check_character(recount, truth, record, report):
    """`record.character` against the events and certified counts."""
    ranges = record["character"]
    check_partition("character", ranges, report)
    known = [e for e in truth if e.on_axis or e.real_meetings]
    check_edges("character", ranges, known, lambda event: changes(recount, known, event), report)
    for r in ranges:
        for value in samples(r):
            kinds = recount.at(value)
            found = (r["realPoles"], r["pairs"], r["name"])
            report.equal(f"character: kinds at {value}", (kinds.real, kinds.pairs, kinds.name), found)


def changes(recount, known, event):
    """True if the word or the kinds change at the event, or are others exactly there."""
    before, after = (recount.at(v) for v in beside(known, event))
    described = [(k.real, k.pairs, k.name) for k in (before, event.state, after)]
    return described[0] != described[2] or described[1][2] not in (described[0][2], described[2][2]) or event_only(described)


def event_only(described):
    """True for kinds that stand at the event alone, as at a triple real pole."""
    at, around = described[1], (described[0], described[2])
    return at[0] > max(d[0] for d in around)


def beside(known, event):
    """Rationals on both sides of an event, nearer than any other."""
    index = known.index(event)
    here = exact(event.value)
    reach = max(abs(here), rational("1e-300")) / 2
    for neighbour in known[max(0, index - 1) : index] + known[index + 1 : index + 2]:
        reach = min(reach, abs(exact(neighbour.value) - here) / 2)
    step = reach / 1024
    return short(here - step, step), short(here + step, step)


def short(value, room):
    """A rational of few bits within a quarter of `room` of a value."""
    if room <= 0:
        raise ValueError(f"no room beside {value}: brackets that meet")
    unit = fmpq(1)
    while unit > room / 4:
        unit /= 2
    while unit < room / 16:
        unit *= 2
    return (value / unit).floor() * unit


def check_partition(what, ranges, report):
    """First range from −∞, last to +∞, one's end the next one's beginning."""
    if not report.check(bool(ranges), f"{what}: ranges", "at least one", ranges):
        return
    report.check(ranges[0]["from"] is None, f"{what}: first end", None, ranges[0]["from"])
    report.check(ranges[-1]["to"] is None, f"{what}: last end", None, ranges[-1]["to"])
    for left, right in zip(ranges, ranges[1:]):
        report.equal(f"{what}: adjacent ends", left["to"], right["from"])
        report.check(left["to"] is not None, f"{what}: inner end", "an edge", None)
    edges = [r["to"] for r in ranges[:-1] if r["to"]]
    for edge in edges:
        check_bracket(what, edge, report)
    for a, b in zip(edges, edges[1:]):
        good = exact_text(a["bracket"][1]) < exact_text(b["bracket"][0])
        report.check(good, f"{what}: edges ascend", f"{a['bracket']} before", b["bracket"])


def check_bracket(what, edge, report):
    """low ≤ value ≤ high, narrow, the exact value inside."""
    low, high = (exact_text(t) for t in edge["bracket"])
    value = rational(Fraction(edge["value"]))
    name = f"{what}: bracket of {edge['value']!r}"
    report.check(low <= high, f"{name} in order", "low <= high", edge["bracket"])
    # The value is the nearest f64, which for a sharper bracket may lie beside it by half a unit in the last place.
    inside = low <= value <= high or edge["value"] in (float_of(low), float_of(high))
    report.check(inside, f"{name} holds the value", edge["value"], edge["bracket"])
    width = high - low
    report.check(width <= abs(value) * rational(str(tolerances.BRACKET_WIDTH)), f"{name} width", "1e-15 relative", edge["bracket"])
    if edge["exact"] is not None:
        whole = exact_text(edge["exact"])
        report.check(low <= whole <= high, f"{name} holds the exact value", edge["exact"], edge["bracket"])
    report.check(edge["proven"], f"{name} proven", True, edge["proven"])


def check_edges(what, ranges, known, needed, report):
    """Each record edge holds a known event; each known event that is needed is in a record edge."""
    edges = [r["to"] for r in ranges[:-1] if r["to"]]
    spans = [tuple(exact_text(t) for t in e["bracket"]) for e in edges]
    held = [[event for event in known if holds(span, event)] for span in spans]
    for event in known:
        good = any(event in events for events in held) or not needed(event)
        report.check(good, f"{what}: edge missed", event.value.str(20), [e["value"] for e in edges])
    for edge, events in zip(edges, held):
        where = f"{what}: edge {edge['value']!r}"
        if report.check(bool(events), f"{where} is a true one", "one of " + str([e.value.str(12) for e in known]), edge["bracket"]):
            check_edge(where, edge, events, report)


def holds(span, event):
    """True if the event's ball can lie in the bracket."""
    with precision(EVENT_BITS):
        if event.rational is not None:
            return span[0] <= event.rational <= span[1]
        return not (event.value < arb(span[0]) or event.value > arb(span[1]))


def check_edge(where, edge, events, report):
    """Kind, ω and the state exactly there."""
    kinds = {k for e in events for k in kinds_of(e)}
    report.check(edge["kind"] in kinds, f"{where} kind", kinds, edge["kind"])
    omegas = sorted(float(w.mid()) for e in events for w in e.omegas)
    good = len(omegas) == len(edge["omegas"]) and all(close(a, b) for a, b in zip(omegas, sorted(edge["omegas"])))
    report.check(good, f"{where} omegas", omegas, edge["omegas"])
    if edge["kind"] == "axis crossing":
        report.check(edge["omega"] in edge["omegas"], f"{where} omega", omegas, edge["omega"])
    if len(events) > 1:
        return
    state = events[0].state
    report.equal(f"{where}: unstable poles there", state.right, edge["unstablePoles"])
    report.equal(f"{where}: axis poles there", state.axis, edge["axisPoles"])
    report.equal(f"{where}: word there", state.name, edge["name"])
    value = events[0].rational
    if edge["exact"] is not None:
        report.equal(f"{where}: exact value", value, exact_text(edge["exact"]))
    elif value is not None:
        report.check(max(abs(value.p), value.q) > tolerances.SHORT_NUMBER, f"{where}: exact value", value, None)


def kinds_of(event):
    """The kinds an edge at this event may have."""
    kinds = set()
    if event.omegas:
        kinds.add("axis crossing")
    if event.origin:
        kinds.add("origin crossing")
    if event.drop:
        kinds.add("degree drop")
    if event.real_meetings:
        kinds |= {"breakaway", "break-in"} if event.rational != 0 else {"repeated pole"}
    return kinds


def close(a, b):
    """Two frequencies agree."""
    return abs(a - b) <= tolerances.OMEGA * abs(a)


def samples(r):
    """Exact values of the knob inside a range: the middle, close to the ends, far out."""
    low = exact_text(r["from"]["bracket"][1]) if r["from"] else None
    high = exact_text(r["to"]["bracket"][0]) if r["to"] else None
    if low is None and high is None:
        return [fmpq(0), fmpq(-1), fmpq(1), rational("1e12"), rational("-1e12")]
    if low is None:
        return outward(high, -1)
    if high is None:
        return outward(low, 1)
    found = [short((low + high) / 2, (high - low) / 8)]
    if high - low > 4 * NEAR * max(abs(low), abs(high)):
        found += [low + NEAR * (abs(low) or high), high - NEAR * (abs(high) or -low)]
    if low > 0 and high > 4 * low or high < 0 and low < 4 * high:
        found.append(high / 2 if high > 0 else low / 2)
    return found


def outward(end, sign):
    """Values beyond the last edge."""
    reach = abs(end) or fmpq(1)
    return [end + sign * NEAR * reach] + [end + sign * reach * far for far in FAR]
