"""Published figures, and facts of the trade, read from Stayband's records.

`figures.json` and `figures_of_responses.json` hold figures from textbooks and test sets with their sources; where a source was not at hand it says "from memory".
Each is compared twice: the record with the independently computed value, to `COMPUTED`, and with the figure as printed, to the
precision it is printed with. Where the printed figure DIFFERS from the computed one its note says why, and only the computed one
counts. `read` says where in the record the figure is found.
"""

import json
from decimal import Decimal
from fractions import Fraction
from pathlib import Path

import of_responses
from binary import NoAnswer
from report import Report
from trade import FACTS, SOURCE

#: Relative to the computed figure, which has 20 digits; f64 has 16, of which clustered roots lose some.
COMPUTED = 1e-12
#: Units of the last printed digit: half of one where the printed figure is rounded, two where the source rounds loosely.
ROUNDED, LOOSE = 0.5, 2.0


def figures():
    """All figures and facts, as objects with an `id`."""
    files = ("figures.json", "figures_of_responses.json")
    listed = [figure for name in files for figure in json.loads((Path(__file__).parent / name).read_text(encoding="utf-8"))]
    return listed + [{"id": name} for name in FACTS]


def check(key, records):
    """(name, project, passed, failures) of one figure or fact."""
    report, asked = Report(), []

    def ask(project):
        asked.append(json.dumps(project, ensure_ascii=False))
        answer = records.ask(asked[-1])["answer"]
        if answer["record"] is None:
            raise NoAnswer(str(answer["problems"]))
        return answer["record"]

    name = f"{key}: {SOURCE}"
    try:
        if key in FACTS:
            FACTS[key](ask, report)
        else:
            figure = next(f for f in figures() if f["id"] == key)
            name = f"{key}: {figure['quantity']} ({figure['source']}; {figure['read_or_memory']})"
            check_figure(figure, ask(project_of(figure)), report)
    except (NoAnswer, StopIteration, LookupError, TypeError) as reason:
        report.check(False, "a figure in the record", "present", repr(reason))
    return name, " ".join(asked), report.passed, report.failures


def project_of(figure):
    """The project of a figure: the plant as it is, or for a polynomial p the plant 1/p at zero gain."""
    system = figure["system"]
    if figure["read"] in of_responses.READ:
        return of_responses.project_of(figure, quotient)
    if system["form"] == "num/den":
        plant = quotient(system["num"], system["den"])
    else:
        plant = f"1/({polynomial(system['coeffs'])})"
    return {
        "format": "stayband-project/1",
        "title": figure["source"],
        "loop": {"controller": "K", "plant": plant, "sensor": "1", "feedback": "negative"},
        "quantities": [],
        "knob": "K",
        "setting": {"value": "0"},
    }


def quotient(above, below):
    """A ratio of polynomials as typed."""
    return f"({polynomial(above)})/({polynomial(below)})"


def polynomial(coefficients):
    """A polynomial as typed, highest power first."""
    terms = [f"{decimal(c)} s^{len(coefficients) - 1 - i}" for i, c in enumerate(coefficients) if c != 0]
    return " + ".join(terms).replace("+ -", "- ").replace(" s^0", "")


def decimal(value):
    """A coefficient as an exact decimal."""
    if isinstance(value, str) and "/" in value:
        top, bottom = value.split("/")
        value = Decimal(top) / Decimal(bottom)
    return format(Decimal(str(value)), "f")


def check_figure(figure, record, report):
    """The figure as read from the record against the computed and the printed one."""
    found = READ[figure["read"]](record, figure)
    allowed = of_responses.COMPUTED.get(figure["read"], COMPUTED)
    computed, printed = numbers(figure["computed"]), numbers(figure["expected"])
    if figure["read"] == "deviation from the unit circle":
        report.check(abs(found[0]) <= COMPUTED, "computed", computed, found)
        return
    near = len(found) == len(computed) and all(close(a, b, allowed * max(abs(b), tiny(computed))) for a, b in zip(found, computed))
    report.check(near, "computed", computed, found)
    if figure["expected"] is None or figure["agreement"] == "DIFFERS":
        return
    unit = last_digit(figure)
    good = len(found) == len(printed) and all(close(a, b, unit or COMPUTED * max(abs(b), tiny(printed))) for a, b in zip(found, printed))
    report.check(good, f"printed, {figure['published_precision']}", printed, found)


def tiny(values):
    """The scale on which a figure that is zero is judged."""
    return max((abs(v) for v in values if v not in (float("inf"), float("-inf"))), default=1.0) or 1.0


def close(a, b, allowed):
    """Equal, infinite alike, or within an allowance."""
    return a == b or abs(a - b) <= allowed


def last_digit(figure):
    """The allowance of a printed figure; 0 where it is exact."""
    words = figure["published_precision"].split()
    if words[0] != "last":
        return 0.0
    units = LOOSE if "loose" in figure["agreement"] else ROUNDED
    return float(words[-1]) * units * (1 + 1e-9)


def numbers(value):
    """Figures in one flat list."""
    if value is None:
        return []
    if isinstance(value, list):
        return [n for v in value for n in numbers(v)]
    return [float(Fraction(value)) if value not in ("inf", "-inf") else float(value)]


# Where a figure stands in the record.


def stable_ranges(record, lowest):
    """Ends of the stable ranges above `lowest`, neighbours across a touching edge joined."""
    found = []
    for r in record["stability"]:
        low = r["from"]["value"] if r["from"] else float("-inf")
        high = r["to"]["value"] if r["to"] else float("inf")
        if r["stable"] and high > lowest:
            found += [max(low, lowest), high]
    return found


def marks(record, kinds, test=lambda mark: True):
    """Landmarks of these kinds."""
    return [m for m in record["landmarks"] if m["kind"] in kinds and test(m)]


def crossing(record, figure):
    """ω and gain of the crossing at a positive gain that ends the stable range."""
    mark = marks(record, {"axis crossing"}, lambda m: m["knob"] > 0)[0]
    both = [mark["s"]["im"], mark["knob"]]
    return both if figure["read"].endswith("gain") else both[:1]


def real_meeting(record, figure):
    """Place, and where printed the gain, of the only real breakaway or break-in at a gain of the printed sign."""
    computed = numbers(figure["computed"])
    kind = {"triple breakaway": {"breakaway", "break-in"}}.get(figure["read"], {figure["read"]})
    wanted = 3 if figure["read"] == "triple breakaway" else 2
    found = marks(record, kind, lambda m: m["s"]["im"] == 0 and m["sign"] == "positive" and m["multiplicity"] == wanted)
    mark = min(found, key=lambda m: abs(m["s"]["re"] - computed[0]))
    return [mark["s"]["re"], mark["knob"]][: len(computed)]


def complex_meeting(record, figure):
    """Place and gain of the breakaway off the real axis."""
    (mark,) = marks(record, {"breakaway"}, lambda m: m["s"]["im"] > 0)
    return [mark["s"]["re"], mark["s"]["im"], mark["knob"]]


def departure(record, figure):
    """The direction in which the branch of a positive gain leaves the pole."""
    place = complex(*figure["place"])
    (mark,) = marks(
        record, {"departure"}, lambda m: m["sign"] == "positive" and abs(complex(m["s"]["re"], m["s"]["im"]) - place) < 1e-9
    )
    return [mark["angle"]]


def all_roots(record):
    """Every pole of the open loop, as often as it occurs, in the order of the figures: by real part, then imaginary part."""
    listed = [(p["re"], p["im"]) for p in record["poles"] for _ in range(p["multiplicity"])]
    return sorted(listed, key=lambda p: (round(p[0], 9), p[1]))


def counts(record):
    """Right, on the axis, left."""
    closed = record["closedLoop"]
    right, axis = closed["unstablePoles"], closed["axisPoles"]
    return [right, axis, record["model"]["order"] - right - axis]


def at_zero_gain(record):
    """Coefficients of the characteristic polynomial at zero gain, highest power first, the first one scaled to one."""
    column = [int(row[0]) for row in reversed(record["model"]["coefficients"])]
    return [float(Fraction(c, column[0])) for c in column]


READ = {
    "stable gains": lambda record, figure: stable_ranges(record, 0.0),
    "stable gains of both signs": lambda record, figure: stable_ranges(record, float("-inf")),
    "ultimate gain": lambda record, figure: stable_ranges(record, 0.0)[1:2],
    "crossing frequency and gain": crossing,
    "crossing frequency": crossing,
    "breakaway": real_meeting,
    "break-in": real_meeting,
    "triple breakaway": real_meeting,
    "complex breakaway": complex_meeting,
    "real-axis segments": lambda record, figure: [end for pair in record["realAxis"]["positive"] for end in pair],
    "centroid": lambda record, figure: [record["asymptotes"]["positive"]["centroid"]],
    "departure angle": departure,
    "root counts": lambda record, figure: counts(record),
    "coefficients at zero gain": lambda record, figure: at_zero_gain(record),
    "second coefficient": lambda record, figure: at_zero_gain(record)[1:2],
    "roots": lambda record, figure: [part for pole in all_roots(record) for part in pole],
    "real roots": lambda record, figure: [re for re, im in all_roots(record) if im == 0],
    "upper roots": lambda record, figure: [part for pole in all_roots(record) if pole[1] >= 0 for part in pole],
    "complex roots above the axis": lambda record, figure: [part for pole in all_roots(record) if pole[1] > 0 for part in pole],
    "imaginary parts on the axis": lambda record, figure: sorted(im for re, im in all_roots(record) if re == 0),
    "largest root": lambda record, figure: [max(re for re, im in all_roots(record) if im == 0)],
    "deviation from the unit circle": lambda record, figure: [max(abs(abs(complex(*p)) - 1) for p in all_roots(record))],
} | of_responses.READ
