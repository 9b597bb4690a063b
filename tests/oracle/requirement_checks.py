"""All checks of one case with requirements."""

import traceback
from fractions import Fraction

from binary import NoAnswer
from check_permitted import check_permitted
from check_requirements import check_requirements
from check_responses import check_responses
from check_roots import check_list
from polynomials import rational
from report import Report
from responses import LoopAt


def check_case(case, records):
    """Asks for the record and holds it against the loop worked out anew."""
    report = Report()
    try:
        answer = records.ask(case.text)["answer"]
    except NoAnswer as reason:
        report.check(False, "an answer", "a record", reason)
        return report
    if report.check(answer["record"] is not None, "a record", "a record", answer["problems"]):
        check_record(case, answer["record"], report)
    return report


def check_record(case, record, report):
    """Every check; one that breaks down is a failure of its own and does not hide the others."""
    known = {}

    def loops(knob):
        if knob not in known:
            known[knob] = LoopAt(case, rational(Fraction(knob)))
        return known[knob]

    for name, check in (
        ("closed loop", lambda: check_list("closed loop", case.loop.at(rational(case.knob)), record["closedLoop"]["poles"], report)),
        ("responses", lambda: check_responses(case, loops(case.knob), record, report)),
        ("requirements", lambda: check_requirements(case, loops, record, report)),
        ("permitted", lambda: check_permitted(case, record, report)),
    ):
        try:
            check()
        except Exception:
            report.check(False, f"{name}: check", "to run through", traceback.format_exc(limit=-4))
