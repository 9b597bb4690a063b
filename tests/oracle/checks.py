"""All checks of one case."""

import traceback

import events
from binary import NoAnswer
from check_branches import check_branches, check_drawn
from check_landmarks import check_asymptotes, check_landmarks, check_real_axis
from check_ranges import Recount, check_character, check_stability
from check_roots import check_roots
from report import Report


def check_case(case, records, with_branches=True):
    """Asks for the record and holds it against the truth. The branches take nine tenths of the time."""
    report = Report()
    try:
        reply = records.ask(case.text)
    except NoAnswer as reason:
        report.check(False, "an answer", "a record", reason)
        return report
    answer = reply["answer"]
    if report.check(answer["record"] is not None, "a record", "a record", answer["problems"]):
        branches = reply["branches"] if with_branches else None
        check_record(case, events.events(case.loop), answer["record"], branches, report)
    return report


def check_record(case, truth, record, branches, report):
    """Every check; one that breaks down is a failure of its own and does not hide the others."""
    recount = Recount(case.loop)
    for name, check in (
        ("model", lambda: check_model(case, record, report)),
        ("stability", lambda: check_stability(recount, truth, record, report)),
        ("character", lambda: check_character(recount, truth, record, report)),
        ("landmarks", lambda: check_landmarks(case, truth, record, report)),
        ("asymptotes", lambda: check_asymptotes(case, record, report)),
        ("real axis", lambda: check_real_axis(case, record, report)),
        ("roots", lambda: check_roots(case, record, report)),
        ("drawn", lambda: check_drawn(record, report)),
        ("branches", lambda: branches is None or check_branches(case, truth, record, branches, report)),
    ):
        try:
            check()
        except Exception:
            report.check(False, f"{name}: check", "to run through", traceback.format_exc(limit=-4))


def check_model(case, record, report):
    """The characteristic polynomial up to a common factor."""
    model, loop = record["model"], case.loop
    report.equal("model: order", loop.order, model["order"])
    report.equal("model: degree in the knob", loop.knob_degree, model["knobDegree"])
    claimed = [[int(c) for c in row] for row in model["coefficients"]]
    mine = loop.coefficients()
    width = max(len(row) for row in claimed + mine)
    claimed, mine = ([row + [0] * (width - len(row)) for row in table] for table in (claimed, mine))
    a, b = (next((c for row in table for c in row if c), 0) for table in (claimed, mine))
    same = len(claimed) == len(mine) and all(
        x * b == y * a for row, other in zip(claimed, mine) for x, y in zip(row, other)
    )
    report.check(a != 0 and same, "model: coefficients", mine, claimed)
