"""All checks of what the printed sheet needs."""

import traceback

from binary import NoAnswer
from check_derivation import check_derivation
from check_step_up import check_step_up
from report import Report

#: Random loops, and loops with requirements, whose sheet is checked.
RANDOM = 150
WITH_REQUIREMENTS = 50


def check_case(case, records):
    """Asks for the record with its sheet and works the sheet through."""
    report = Report()
    try:
        answer = records.ask(case.text)["answer"]
    except NoAnswer as reason:
        report.check(False, "an answer", "a record", reason)
        return report
    if report.check(answer["record"] is not None, "a record", "a record", answer["problems"]):
        for name, check in (("derivation", check_derivation), ("plan", check_step_up)):
            try:
                check(case, answer["record"], report)
            except Exception:
                report.check(False, f"{name}: check", "to run through", traceback.format_exc(limit=-4))
    return report
