"""Compares Stayband's records with certified truth, and the published figures with both.

    run.py --binary target/release/records              everything
    run.py --binary … --only 117                        the random loop of seed 117
    run.py --binary … --only requirements-12            the random loop with requirements of seed 12
    run.py --binary … --only sheet-12                   the sheet of the random loop of seed 12; also sheet-requirements-12
    run.py --binary … --only site-12                    the machine of seed 12, measured and found again
    run.py --binary … --only "touching edge"            a nasty one by name
    run.py --binary … --self-test                       shows that the checks can fail

Prints each failure with the project, what was expected and what was found, and ends with "N passed, M failed".
"""

import argparse
import json
import multiprocessing
import os
import signal
import sys
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
sys.path.insert(0, str(Path(__file__).parent.parent / "published"))

import published
import requirement_cases
import requirement_checks
import check_site
import selftest
import selftest_requirements
import sheet_checks
from binary import Records
from checks import check_case
from generator import random_case
from nasty import all_cases

#: Random loops in a run; --seeds asks for more.
SEEDS = 520
#: Random loops above this order have their branches followed in one of so many only: it takes seconds each.
ALWAYS_FOLLOWED = 10
FOLLOWED_EACH = 5
#: Failures shown of one case; the rest is counted.
SHOWN = 6
#: Seconds after which a case counts as hanging, and fails.
PATIENCE = 240
#: Cases named at the end, so that one that grows slow is seen.
SLOWEST = 5


def main():
    arguments = parse()
    started = time.monotonic()
    jobs = named_jobs(arguments.only) if arguments.only else every_job(arguments.seeds)
    passed, failed, slowest = 0, 0, []
    with multiprocessing.Pool(arguments.workers, initializer=start_worker, initargs=(arguments.binary,)) as pool:
        if arguments.self_test or not arguments.only:
            for test in (selftest, selftest_requirements):
                counts = show(pool.apply(run_self_test, (test.__name__,)))
                passed, failed = passed + counts[0], failed + counts[1]
        if not arguments.self_test:
            for seconds, result in pool.imap_unordered(run_job, jobs, chunksize=1):
                counts = show(result)
                passed, failed = passed + counts[0], failed + counts[1]
                slowest = sorted([*slowest, (seconds, result[0])], reverse=True)[:SLOWEST]
    print("slowest: " + ", ".join(f"{name} {seconds:.1f} s" for seconds, name in slowest))
    print(f"{time.monotonic() - started:.0f} s")
    print(f"{passed} passed, {failed} failed")
    return 1 if failed or not passed else 0


def parse():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--binary", required=True, help="the program `records` of crate stayband-tests")
    parser.add_argument("--only", help="one seed, name of a nasty case, or id of a published figure")
    parser.add_argument("--seeds", type=int, default=SEEDS, help="number of random loops")
    parser.add_argument("--workers", type=int, default=os.cpu_count())
    parser.add_argument("--self-test", action="store_true", help="only show that each check fails on a corrupted record")
    return parser.parse_args()


def every_job(seeds):
    """The slow ones first, so that the workers end together."""
    nasty = sorted(all_cases(), key=lambda case: -case.loop.order)
    return (
        [("nasty", case.name) for case in nasty]
        + [("requirements", f"requirements-{seed}") for seed in range(requirement_cases.SEEDS)]
        + [("sheet", f"sheet-{seed}") for seed in range(sheet_checks.RANDOM)]
        + [("sheet", f"sheet-requirements-{seed}") for seed in range(sheet_checks.WITH_REQUIREMENTS)]
        + [("site", f"site-{seed}") for seed in range(check_site.SEEDS)]
        + [("random", seed) for seed in sorted(range(seeds), key=lambda seed: -(seed % 19))]
        + [("published", figure["id"]) for figure in published.figures()]
    )


def named_jobs(name):
    """The jobs of this seed or name."""
    if name.isdigit():
        return [("random", int(name))]
    found = [job for job in every_job(0) if job[1] == name]
    if not found:
        sys.exit(f"no case is called {name!r}")
    return found


RECORDS = None
SHEETS = None


def start_worker(path):
    """Every worker talks to its own processes of the program, and gives up a case that hangs."""
    global RECORDS, SHEETS
    RECORDS, SHEETS = Records(path), Records(path, "--sheet")
    signal.signal(signal.SIGALRM, give_up)


def give_up(*_):
    raise TimeoutError(f"not ended after {PATIENCE} s")


def run_self_test(name):
    return sys.modules[name].run(RECORDS)


def run_job(job):
    """Seconds of the processor, and (name, project, passed, failures)."""
    started = time.process_time()
    signal.alarm(PATIENCE)
    try:
        result = checked(job)
    except TimeoutError as reason:
        result = (str(job[1]), "", 0, [("the check", "to end", str(reason))])
    signal.alarm(0)
    return time.process_time() - started, result


def checked(job):
    """(name, project, passed, failures)."""
    kind, key = job
    if kind == "published":
        result = published.check(key, RECORDS)
    elif kind == "requirements":
        case = requirement_cases.requirement_case(int(key.removeprefix("requirements-")))
        report = requirement_checks.check_case(case, RECORDS)
        result = case.name, case.text, report.passed, report.failures
    elif kind == "sheet":
        name = key.removeprefix("sheet-")
        seed = int(name.removeprefix("requirements-"))
        case = random_case(seed) if name.isdigit() else requirement_cases.requirement_case(seed)
        report = sheet_checks.check_case(case, SHEETS)
        result = key, case.text, report.passed, report.failures
    elif kind == "site":
        project, report = check_site.check_site(int(key.removeprefix("site-")), SHEETS)
        result = key, project, report.passed, report.failures
    else:
        case = random_case(key) if kind == "random" else next(c for c in all_cases() if c.name == key)
        followed = kind == "nasty" or case.loop.order <= ALWAYS_FOLLOWED or key % FOLLOWED_EACH == 0
        report = check_case(case, RECORDS, with_branches=followed)
        result = case.name, case.text, report.passed, report.failures
    return result


def show(result):
    """Prints what failed; (passed, failed)."""
    name, project, passed, failures = result
    if failures:
        print(f"\n=== {name}\n    {project}")
        for what, expected, actual in failures[:SHOWN]:
            print(f"  {what}\n    expected {expected[:600]}\n    actual   {actual[:600]}")
        if len(failures) > SHOWN:
            print(f"  and {len(failures) - SHOWN} more")
        sys.stdout.flush()
    return passed, len(failures)


if __name__ == "__main__":
    sys.exit(main())
