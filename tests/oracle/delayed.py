"""A loop with dead time, simulated: fixed steps of the classical Runge-Kutta method, the delayed signal read from its own history by
cubic Hermite interpolation. No transform and no approximation of the dead time."""

import math

import numpy as np

#: Steps in the fastest time constant or, of an oscillation, in one radian.
PER_RADIAN = 24


class Plant:
    """gain · N/D, strictly proper, in controllable form; coefficients highest power first."""

    def __init__(self, gain, above, below):
        below = np.array(below, float)
        above = np.concatenate([np.zeros(len(below) - len(above)), np.array(above, float)])
        order = len(below) - 1
        self.matrix = np.diag(np.ones(order - 1), 1)
        self.matrix[-1] = -below[:0:-1] / below[0]
        self.output = gain * above[:0:-1] / below[0]
        self.gain, self.above, self.below = gain, above, below

    def at(self, s):
        return self.gain * np.polyval(self.above, s) / np.polyval(self.below, s)


def step(plant, dead_time, end):
    """Times and output of the unity-feedback loop after a unit step of the command, before the dead time acts on the output."""
    fastest = max(np.abs(np.linalg.eigvals(plant.matrix)).max(), crossover(plant))
    h = 1 / (PER_RADIAN * fastest)
    if dead_time:
        lag = max(1, math.ceil(dead_time / h))
        h = dead_time / lag
    else:
        lag = 0
    count = int(end / h) + 1
    x = np.zeros(len(plant.matrix))
    z, slope = np.zeros(count + 1), np.zeros(count + 1)
    slope[0] = plant.output @ rate(plant, x, 1.0)
    for k in range(count):
        if lag:
            drive = [1 - value for value in history(z, slope, k - lag, h)]
            x = advance(plant, x, h, lambda _, i: drive[i])
            after = 1 - (z[k + 1 - lag] if k + 1 >= lag else 0.0)
        else:
            x = advance(plant, x, h, lambda state, _: 1 - plant.output @ state)
            after = 1 - plant.output @ x
        z[k + 1] = plant.output @ x
        slope[k + 1] = plant.output @ rate(plant, x, after)
    return h * np.arange(count + 1), z


def rate(plant, x, e):
    change = plant.matrix @ x
    change[-1] += e
    return change


def advance(plant, x, h, drive):
    """One step; `drive(state, 0 | 1 | 2)` is the input at its beginning, middle and end."""
    a = rate(plant, x, drive(x, 0))
    b = rate(plant, x + h / 2 * a, drive(x + h / 2 * a, 1))
    c = rate(plant, x + h / 2 * b, drive(x + h / 2 * b, 1))
    d = rate(plant, x + h * c, drive(x + h * c, 2))
    return x + h / 6 * (a + 2 * b + 2 * c + d)


def history(z, slope, k, h):
    """z at k, k + 1/2 and k + 1 steps; before the beginning it is zero."""
    if k < 0:
        return 0.0, 0.0, 0.0
    return z[k], (z[k] + z[k + 1]) / 2 + h * (slope[k] - slope[k + 1]) / 8, z[k + 1]


def crossover(plant):
    """The highest frequency at which the open loop has magnitude 1."""
    squared = lambda p: np.polymul(p, p * (-1.0) ** np.arange(len(p) - 1, -1, -1))
    roots = np.roots(np.polysub(squared(plant.below), squared(plant.gain * plant.above)))
    axis = [abs(z.imag) for z in roots if abs(z.real) < 1e-6 * abs(z)]
    return max(axis, default=0.0)


def peaks(times, values):
    """(time, value) of every maximum, by the parabola through three values."""
    found = []
    for k in range(1, len(values) - 1):
        a, b, c = values[k - 1 : k + 2]
        if a < b >= c:
            part = (a - c) / (2 * (a - 2 * b + c))
            found.append((times[k] + part * (times[1] - times[0]), b - (a - c) * part / 4))
    return found


def limit(plant, dead_time):
    """The smallest gain factor and its ω at which plant and dead time oscillate, by bisection of the phase."""
    lag = lambda w: math.pi + np.angle(plant.at(1j * w) * np.exp(-1j * w * dead_time))
    low = 1e-3 * max(np.abs(np.linalg.eigvals(plant.matrix)).max(), 1e-9)
    wrapped = lambda w: (lag(w) + math.pi) % math.tau - math.pi
    best = None
    grid = low * np.logspace(0, 6, 6000)
    for a, b in zip(grid, grid[1:]):
        fa, fb = wrapped(a), wrapped(b)
        if fa > 0 >= fb and fa - fb < math.pi:
            for _ in range(60):
                middle = (a + b) / 2
                a, b = (middle, b) if wrapped(middle) > 0 else (a, middle)
            factor = 1 / abs(plant.at(1j * a))
            best = (factor, a) if best is None or factor < best[0] else best
    return best
