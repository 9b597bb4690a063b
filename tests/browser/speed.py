"""Times numpy's batched eigvals on the loop that speed.rs measured. JSON in, milliseconds out."""

import json
import statistics
import sys
import time

import numpy

#: As many as the browser's runs would be too slow; a median of these is steady.
RUNS = 20


def companions(coefficients, knobs):
    """One companion matrix a knob: ones below the diagonal, the monic coefficients in the last column."""
    order = len(coefficients) - 1
    low, high = coefficients[:, :1], coefficients[:, 1:2]
    values = low + high * knobs
    matrices = numpy.zeros((len(knobs), order, order))
    matrices[:, range(1, order), range(order - 1)] = 1.0
    matrices[:, :, order - 1] = -(values[:-1] / values[-1]).T
    return matrices


def main():
    measured = json.load(sys.stdin)
    rows = measured["record"]["model"]["coefficients"]
    coefficients = numpy.array([[float(number) for number in (row + ["0", "0"])[:2]] for row in rows])
    order = len(coefficients) - 1
    finite = sorted(knob for knob in measured["knobs"] if knob is not None)
    # Every matrix gives as many points as the order; so this many matrices give as many points as the locus has.
    matrices = companions(coefficients, numpy.array(finite[::order]))
    times = []
    for _ in range(RUNS):
        start = time.perf_counter()
        numpy.linalg.eigvals(matrices)
        times.append((time.perf_counter() - start) * 1e3)
    print(statistics.median(times))


if __name__ == "__main__":
    main()
