"""Poles, branches, step answers and margins of loops with dead time against independent computations.

Poles: each solves the equation, and as many as the winding around the view says. Branches: at random knob values every
pole in the view lies within a third of a pixel of exactly as many branches as it counts. Answers: a Runge-Kutta
simulation with a dense history, steps of a 400th of the fastest time constant. Margins: a fine grid. Scalar loops:
Lambert's W.

Run: python tests/oracle/dead_time_parts.py PROGRAM [--loops 60] [--seed 1]
"""

import argparse
import json
import subprocess
import sys

import numpy as np
from scipy.special import lambertw

from dead_time import padded, random_loop, unstable, value

# Allowed errors. Residual: beside the sum of the terms' magnitudes. Distance to a branch: pixels. Answer: beside its
# largest value; the simulation itself keeps 1e-9. Margins: relative, of a grid search with bisection.
RESIDUAL, PIXELS, ANSWER, MARGIN = 1e-10, 0.34, 3e-7, 1e-6
# Steps of the simulation for one time constant, and its longest run in steps.
STEPS, RUN_CAP = 60, 60_000


def quasi(a, b, time, s):
    return value(a, s) + value(b, s) * np.exp(-time * s)


def winding(a, b, time, left, right, top):
    """Zeros in the rectangle, astride the real axis."""
    count = 20_000
    corners = [complex(right, -top), complex(right, top), complex(left, top), complex(left, -top), complex(right, -top)]
    path = np.concatenate([np.linspace(p, q, count, endpoint=False) for p, q in zip(corners, corners[1:])] + [[corners[0]]])
    f = quasi(a, b, time, path)
    turns = np.angle(f[1:] / f[:-1])
    return int(round(turns.sum() / (2 * np.pi))) if np.abs(turns).max() < 0.5 else None


def check_poles(ask, task, knob, view, complaints):
    a, time = task["a"], task["deadTime"][0] / task["deadTime"][1]
    length = max(len(task["b0"]), len(task["b1"]))
    b = [int(c) for c in 8 * (padded(task["b0"], length) + knob * padded(task["b1"], length))]
    a8 = [8 * c for c in a]
    answer = ask({"task": "poles", "a": a8, "b": b, "deadTime": task["deadTime"], "view": view})
    if "error" in answer:
        complaints.append(f"poles: {answer['error']}")
        return []
    for re, im, _, _ in answer["poles"]:
        s = complex(re, im)
        size = value(np.abs(a8), abs(s)) + value(np.abs(b), abs(s)) * np.exp(-time * re)
        if abs(quasi(a8, b, time, s)) > RESIDUAL * size:
            complaints.append(f"poles: {s} is none at knob {knob}")
    found = sum(pole[3] for pole in answer["poles"])
    counted = winding(a8, b, time, *view)
    if counted is not None and counted != found:
        complaints.append(f"poles: {found} found, {counted} counted at knob {knob} in {view}")
    return answer["poles"]


def distances(branches, knob, s):
    """The distance of s from the chord of every branch that passes the knob value."""
    found = []
    for branch in branches:
        if (branch["sign"] == "positive") != (knob > 0):
            continue
        points = branch["points"]
        knobs = [abs(p[2]) if p[2] is not None else np.inf for p in points]
        for (p, k), (q, l) in zip(zip(points, knobs), zip(points[1:], knobs[1:])):
            if k <= abs(knob) < l:
                start, end = complex(p[0], p[1]), complex(q[0], q[1])
                way = end - start
                part = ((s - start) * way.conjugate()).real / (abs(way) ** 2 or 1)
                found.append(abs(s - start - way * min(max(part, 0), 1)))
                break
    return found


def check_locus(ask, task, view, rng, complaints):
    answer = ask({**task, "task": "locus", "view": view})
    if "error" in answer:
        complaints.append(f"locus: {answer['error']}")
        return
    pixel = min(view[1] - view[0], 2 * view[2]) / 1000
    for knob in np.round(8 * 10 ** rng.uniform(-1, 2, 6) * rng.choice([-1, 1], 6)) / 8:
        if knob == 0:
            continue
        for re, im, _, count in check_poles(ask, task, knob, view, complaints):
            near = sum(d < PIXELS * pixel for d in distances(answer["branches"], knob, complex(re, im)))
            if near != count:
                complaints.append(f"locus: pole {re} {im} at knob {knob}: {near} branches pass, not {count}")


def simulate(a, b, time, above, times):
    """y at times ≥ 0 of above/(a + b·e^(−sT))·1/s, by classical Runge-Kutta with a history of cubics."""
    order = len(a) - 1
    a, b = np.array(a, float) / a[-1], padded(b, order) / a[-1]
    above = padded(above, order + 1) / np.array(task_leading)
    fastest = np.abs(np.roots(a[::-1])).max()
    pieces = int(np.ceil(time * max(fastest, 1 / time) * STEPS / 2)) * 2
    h = time / pieces
    steps = int(times[-1] / h) + 2
    if steps > RUN_CAP:
        return None
    states, slopes = np.zeros((steps + 1, order)), np.zeros((steps + 1, order))

    def delayed(index, half):
        """State one dead time before step `index` + half/2."""
        k = index - pieces
        if k < 0:
            return np.zeros(order)
        if not half:
            return states[k]
        # The middle of a Hermite cubic.
        return 0.5 * (states[k] + states[k + 1]) + h / 8 * (slopes_right[k] - slopes_left[k + 1])

    def rate(x, past):
        return np.concatenate([x[1:], [1 - a[:order] @ x - b @ past]])

    slopes_right, slopes_left = np.zeros((steps + 1, order)), np.zeros((steps + 1, order))
    for i in range(steps):
        x, now, middle, later = states[i], delayed(i, 0), delayed(i, 1), delayed(i + 1, 0)
        k1 = rate(x, now)
        k2 = rate(x + h / 2 * k1, middle)
        k3 = rate(x + h / 2 * k2, middle)
        k4 = rate(x + h * k3, later)
        states[i + 1] = x + h / 6 * (k1 + 2 * k2 + 2 * k3 + k4)
        slopes_right[i] = k1
        slopes_left[i + 1] = rate(states[i + 1], later)
    out = []
    for t in times:
        k = min(int(round(t / h)), steps)
        x = states[k]
        highest = 1 - a[:order] @ x - b @ delayed(k, 0)
        out.append((k * h, above[:order] @ x + above[order] * highest))
    return out


task_leading = 1.0


def check_response(ask, task, gain, complaints):
    """The answer to a step of command and of load, of a stable loop."""
    global task_leading
    a, b = task["a"], [int(gain * c) for c in task["b1"]]
    time = task["deadTime"][0] / task["deadTime"][1]
    outputs = [{"above": b, "lag": 0.0}, {"above": a, "lag": 0.0}]
    first = ask({"task": "response", "a": a, "b": b, "deadTime": task["deadTime"], "outputs": outputs, "times": []})
    if "error" in first:
        complaints.append(f"response: {first['error']}")
        return False
    task_leading = float(a[-1])
    wanted = np.linspace(0, first["outputs"][0]["end"], 60)
    checked = False
    for index, output in enumerate(outputs):
        simulated = simulate(a, b, time, output["above"], wanted)
        if simulated is None:
            continue
        checked = True
        times = [t for t, _ in simulated]
        answer = ask({"task": "response", "a": a, "b": b, "deadTime": task["deadTime"], "outputs": outputs, "times": times})
        found, expected = answer["outputs"][index]["values"], [y for _, y in simulated]
        worst = np.abs(np.array(found) - expected).max() / np.abs(expected).max()
        if worst > ANSWER:
            complaints.append(f"response {index}: off by {worst}")
    return checked


def check_margins(ask, task, gain, complaints):
    a, b = task["a"], [int(gain * c) for c in task["b1"]]
    time = task["deadTime"][0] / task["deadTime"][1]
    found = ask({"task": "margins", "above": b, "below": a, "deadTime": task["deadTime"], "transfer": b})
    if "error" in found:
        complaints.append(f"margins: {found['error']}")
        return
    omega = np.unique(np.concatenate([np.geomspace(1e-3, 300, 300_000), np.linspace(1e-3, 300, 600_000)]))
    s = 1j * omega
    loop = value(b, s) / value(a, s) * np.exp(-s * time)
    peak = (1 / np.abs(1 + loop)).max()
    # A peak next to 1 may lie where the loop is all but gone.
    if abs(found["peak"][1] / peak - 1) > (1e-5 if peak > 1.06 else 6e-3):
        complaints.append(f"margins: peak {found['peak']}, on the grid {peak}")
    turn = np.angle(-loop)
    crossing = (np.abs(loop[1:]) - 1) * (np.abs(loop[:-1]) - 1) < 0
    phase = np.degrees(np.abs(turn[1:][crossing])).min(initial=np.inf)
    if (found["phase"] is None) != np.isinf(phase) or (found["phase"] or 0) and abs(found["phase"] - phase) > 0.2:
        complaints.append(f"margins: phase {found['phase']}, on the grid {phase}")
    real = (turn[1:] * turn[:-1] < 0) & (np.abs(turn[1:] - turn[:-1]) < 1)
    factors = 1 / np.abs(loop[1:][real])
    at_zero = -value(a, 0) / value(b, 0) if value(b, 0) else 0
    factors = np.append(factors, [at_zero] if at_zero > 0 else [])
    up, down = factors[factors > 1].min(initial=np.inf), (1 / factors[factors < 1]).min(initial=np.inf)
    for name, grid in (("gainUp", up), ("gainDown", down)):
        mine = found[name] if found[name] is not None else np.inf
        # A crossing beyond the grid's end is no fault.
        if np.isinf(grid) and (np.isinf(mine) or name == "gainUp"):
            continue
        if not abs(mine / grid - 1) < 1e-2:
            complaints.append(f"margins: {name} {mine}, on the grid {grid}")
    closed = np.abs(loop / (1 + loop))
    at_rest = abs(value(b, 0) / (value(a, 0) + value(b, 0)))
    below = np.nonzero(closed < at_rest / np.sqrt(2))[0]
    if at_rest > 0 and len(below) and abs(found["bandwidth"] / omega[below[0]] - 1) > 1e-3:
        complaints.append(f"margins: bandwidth {found['bandwidth']}, on the grid {omega[below[0]]}")


def check_scalar(ask, rng, complaints):
    """s + a + b·e^(−sT) = 0: s = W_k(−b·T·e^(aT))/T − a."""
    a, b, time = (int(v) for v in rng.integers(1, 30, 3))
    a *= int(rng.choice([-1, 1]))
    answer = ask({"task": "dominant", "a": [a, 10], "b": [b], "deadTime": [time, 10]})
    scaled_a, scaled_b, delay = a / 10, b / 10, time / 10
    expected = lambertw(-scaled_b * delay * np.exp(scaled_a * delay), 0) / delay - scaled_a
    re, im = answer["poles"][0][:2]
    if abs(complex(re, abs(im)) - complex(expected.real, abs(expected.imag))) > 1e-9 * max(1, abs(expected)):
        complaints.append(f"scalar {a} {b} {time}: {re} {im}, Lambert's {expected}")


def main():
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("program")
    parser.add_argument("--loops", type=int, default=60)
    parser.add_argument("--seed", type=int, default=1)
    arguments = parser.parse_args()
    rng = np.random.default_rng(arguments.seed)
    program = subprocess.Popen([arguments.program], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True)
    times = {}

    def ask(task):
        program.stdin.write(json.dumps(task) + "\n")
        program.stdin.flush()
        answer = json.loads(program.stdout.readline())
        times.setdefault(task["task"], []).append(answer["milliseconds"])
        return answer

    failed, stable, simulated = 0, 0, 0
    for number in range(arguments.loops):
        complaints = []
        loop = random_loop(rng)
        time = loop["deadTime"][0] / loop["deadTime"][1]
        view = [-6.0, 3.0, min(8.0, 20 / time)]
        check_locus(ask, loop, view, rng, complaints)
        check_scalar(ask, rng, complaints)
        for gain in (1, -1, 5):
            b = [gain * c for c in loop["b1"]]
            if unstable(loop["a"], padded(b, len(b)), time) == 0:
                stable += 1
                check_margins(ask, loop, gain, complaints)
                simulated += check_response(ask, loop, gain, complaints)
                break
        failed += bool(complaints)
        for kind, all_times in times.items():
            if all_times[-1] > 20:
                print(f"loop {number}: {kind} took {all_times[-1]:.0f} ms")
        for complaint in complaints[:5]:
            print(f"loop {number}: {complaint}\n  {json.dumps(loop)} {view}")
    summary = ", ".join(f"{name} {np.median(t):.2f}/{max(t):.1f}" for name, t in times.items())
    print(f"{arguments.loops} loops, {stable} stable, {simulated} simulated, {failed} with complaints; ms median/worst: {summary}")
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(main())
