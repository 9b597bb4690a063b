"""Shows that the checks of requirements can fail: every corruption of a record is caught by the check it is meant for."""

import copy

import numpy as np
from binary import NoAnswer
from flint import arb
from report import Report
from requirement_cases import FAMILIES, at, own_case, requirement_case
from requirement_checks import check_record
from scipy.linalg import expm

#: Of the matrix exponential in f64, relative to the largest value.
EXPONENTIAL = 1e-12

#: A loop of our own on which every corruption is possible, and one whose requirements exclude each other: two of them do.
SUBJECT = own_case({"overshoot": "25", "settling-time-2": "2", "damping-ratio": "0.3", "phase-margin": "30"})
EXCLUDING = own_case({"bandwidth": "1", "overshoot": "5", "phase-margin": "30", "ramp-error": "0.05"})


def run(records):
    """(name, project, passed, failures) of all corruptions."""
    report = Report()
    for case, corruptions in ((SUBJECT, CORRUPTIONS), (EXCLUDING, CORRUPTIONS_OF_CONFLICTS)):
        try:
            corrupt_all(case, records.ask(case.text)["answer"]["record"], corruptions, report)
        except NoAnswer as reason:
            report.check(False, "self-test: an answer", "a record", reason)
    check_answers(report)
    return "self-test of requirements", f"{SUBJECT.text} {EXCLUDING.text}", report.passed, report.failures


def corrupt_all(case, record, corruptions, report):
    """The true record passes; every corruption of it is caught."""
    clean = Report()
    check_record(case, record, clean)
    report.check(not clean.failures, "self-test: the true record", "no failure", clean.failures[:3])
    for name, (expected, corrupt) in corruptions.items():
        spoiled = copy.deepcopy(record)
        corrupt(spoiled)
        found = Report()
        check_record(case, spoiled, found)
        hit = [what for what, _, _ in found.failures if what.startswith(expected)]
        report.check(bool(hit) and spoiled != record, f"self-test: {name}", f"a failure of {expected}", [f[0] for f in found.failures])


def check_answers(report):
    """The oracle's partial fractions against a matrix exponential."""
    for seed in range(len(FAMILIES)):
        case = requirement_case(seed)
        answer = at(case, case.knob).answer("output")
        for turns in (0.3, 1, 3, 8) if answer else ():
            t = turns / float(np.abs(answer.p).prod() ** (1 / len(answer.p)))
            expected, found = by_exponential(answer, t), float(answer.exact(arb(t)))
            size = max(answer.scale, abs(answer.end))
            report.check(abs(expected - found) <= EXPONENTIAL * size, f"self-test: answer of {case.name} at {t}", expected, found)


def by_exponential(answer, t):
    """y(t) of the reduced transfer function, by the exponential of its companion matrix with the constant command as one more state."""
    above, below = answer.reduced
    order = below.degree()
    unit = float(np.abs(answer.p).prod() ** (1 / order))
    a, b = (np.array([float(arb(p[i] / below[order])) * unit ** (i - order) for i in range(order + 1)]) for p in (below, above))
    matrix = np.zeros((order + 1, order + 1))
    matrix[: order - 1, 1:order] = np.eye(order - 1)
    matrix[order - 1, :order], matrix[order - 1, order] = -a[:order], 1
    return float((b[:order] - b[order] * a[:order]) @ expm(matrix * unit * t)[:order, order] + b[order])


def scaled(*path, by=1.0001):
    """Changes one number deep inside."""

    def corrupt(record):
        inner = record
        for key in path[:-1]:
            inner = inner[key]
        inner[path[-1]] *= by

    return corrupt


def lane(record, kind):
    return next(r for r in record["requirements"] if r["kind"] == kind)


def shifted_edge(kind, by):
    def corrupt(record):
        edge = lane(record, kind)["ranges"][0]["to"]
        edge["knob"], edge["setting"] = edge["knob"] * by, edge["setting"] * by
        edge["bracket"] = [repr(edge["knob"])] * 2

    return corrupt


def wrong_setting(record):
    lane(record, "overshoot")["ranges"][0]["to"]["setting"] *= 1 + 1e-9


def no_range(record):
    lane(record, "overshoot")["ranges"] = []


def other_verdict(record):
    found = lane(record, "settling-time-2")
    found["met"] = not found["met"]


def no_words(record):
    no_range(record)
    lane(record, "overshoot")["remark"] = None


def wider_permitted(record):
    record["permitted"]["knob"][0]["to"]["knob"] *= 1.01


def end_inward(record):
    ends = record["permitted"]["setting"][0]
    ends[1] = str(float(ends[1]) - 0.5)


def end_off_grid(record):
    ends = record["permitted"]["setting"][0]
    ends[1] = str(float(ends[1]) - 0.125)


def other_suggestion(record):
    suggested = record["permitted"]["suggested"]
    suggested["setting"] = record["permitted"]["setting"][0][0]
    suggested["knob"] = float(suggested["setting"]) * record["scale"]["factor"]


def false_conflict(record):
    record["permitted"]["conflict"] = {"requirements": ["overshoot"], "text": "overshoot"}


def conflict_of(*kinds):
    def corrupt(record):
        record["permitted"]["conflict"]["requirements"] = list(kinds)

    return corrupt


def missing_crossing(record):
    record["margins"]["phaseCrossings"].pop()


CORRUPTIONS = {
    "overshoot wrong": ("step: overshoot", scaled("step", "overshoot", by=1 + 1e-5)),
    "rise time wrong": ("step: riseTime", scaled("step", "riseTime", by=1 + 1e-5)),
    "settling time wrong": ("step: settlingTime2", scaled("step", "settlingTime2", by=1 + 1e-5)),
    "peak time wrong": ("step: peakTime", scaled("step", "peakTime", by=1 + 1e-5)),
    "controller peak wrong": ("step: controllerPeak", scaled("step", "controllerPeak", by=1 + 1e-5)),
    "final value wrong": ("step: finalValue", scaled("step", "finalValue", by=1 + 1e-11)),
    "step curve wrong": ("step: curve", scaled("step", "curve", "value", 40, by=1 + 1e-5)),
    "load peak wrong": ("load: peak", scaled("load", "peak", by=1 + 1e-5)),
    "load final value wrong": ("load: finalValue", scaled("load", "finalValue", by=1 + 1e-11)),
    "gain margin wrong": ("margins: gainUp", scaled("margins", "gainUp", by=1 + 1e-8)),
    "phase margin wrong": ("margins: phase", scaled("margins", "phase", by=1 + 1e-8)),
    "delay margin wrong": ("margins: delay", scaled("margins", "delay", by=1 + 1e-8)),
    "peak sensitivity wrong": ("margins: peakSensitivity", scaled("margins", "peakSensitivity", by=1 + 1e-8)),
    "bandwidth wrong": ("margins: bandwidth", scaled("margins", "bandwidth", by=1 + 1e-8)),
    "crossing missing": ("margins: phaseCrossings", missing_crossing),
    "figure wrong": ("figure: damping-ratio", lambda record: lane(record, "damping-ratio").update(figure=0.5)),
    "verdict wrong": ("met: settling-time-2", other_verdict),
    "computed edge too far": ("edge: overshoot overshoot", shifted_edge("overshoot", 1 + 3e-5)),
    "computed edge too near": ("edge: overshoot overshoot", shifted_edge("overshoot", 1 - 3e-5)),
    "proven edge too far": ("edge: damping-ratio damping-ratio", shifted_edge("damping-ratio", 1 + 1e-11)),
    "edge's setting wrong": ("edge: overshoot overshoot", wrong_setting),
    "range missing": ("ranges: overshoot", no_range),
    "words missing": ("ranges: overshoot remark", no_words),
    "permitted too wide": ("permitted: common part", wider_permitted),
    "largest setting not the largest": ("permitted: largest setting: outermost", end_inward),
    "largest setting off the grid": ("permitted: largest setting: on the grid", end_off_grid),
    "suggestion at an end": ("suggestion: midway", other_suggestion),
    "conflict invented": ("conflict", false_conflict),
    "pole moved": ("closed loop", scaled("closedLoop", "poles", 0, "re", by=1 + 1e-9)),
}

CORRUPTIONS_OF_CONFLICTS = {
    "conflict missing": ("conflict", lambda record: record["permitted"].update(conflict=None)),
    "requirements that do not exclude each other": ("conflict: excludes", conflict_of("overshoot", "phase-margin")),
    "more requirements than needed": ("conflict: no smaller", conflict_of("overshoot", "phase-margin", "ramp-error")),
    "permitted in spite of all": ("permitted: common part", lambda record: record["permitted"]["knob"].append({"from": None, "to": None})),
}
