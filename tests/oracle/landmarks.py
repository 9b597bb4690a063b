"""The landmarks a locus has, from the events and from local expansions: what a record must list and what it may list."""

from dataclasses import dataclass, field
from math import pi
from sys import float_info

from flint import acb, acb_poly, arb, fmpq

from certified import is_real, precision, roots
from events import EVENT_BITS, acb_value
from polynomials import at_knob

#: The knob next to zero at which departures of a loop of higher degree in the knob are measured, as a power of ten, and the bits it
#: takes. The direction is off by its m-th root.
TINY = 120
TINY_BITS = 2000

EPSILON = float_info.epsilon


@dataclass
class Mark:
    """A landmark; `kinds` and `multiplicities` hold every allowed answer."""

    kinds: set
    place: acb
    knob: arb | None
    multiplicities: set
    signs: set
    angle: float | None = None
    required: bool = True
    vague: float = 0.0  # degrees by which f64 places of poles and zeros leave the angle open


def marks(loop, truth):
    """All landmarks of a loop."""
    with precision(EVENT_BITS):
        found = []
        for event in truth:
            found += crossings(loop, event) + meetings(loop, event)
        if loop.knob_degree:
            found += departures(loop)
        if loop.affine:
            found += directions(loop, "arrival", loop.moving[1], loop.moving[0])
        return found


def signs_of(event):
    """The half of the locus; at zero either."""
    if event.rational == 0:
        return {"positive", "negative"}
    return {"positive"} if event.value > 0 else {"negative"}


def meeting_at(event, place):
    """How many poles meet at this place at the event."""
    return next((m for s, m in event.meetings if (s - place).contains(0)), 1)


def fixed_at(loop, place):
    """Multiplicity of a fixed mode at this place."""
    return next((m for s, m in roots(loop.fixed, EVENT_BITS) if (s - place).contains(0)), 0)


def crossings(loop, event):
    """Crossings of the axis and the origin. At zero gain they are poles of the open loop, which a record may leave out."""
    found = []
    places = [("axis crossing", acb(0, w)) for w in event.omegas]
    if event.origin:
        places.append(("origin crossing", acb(0)))
    for kind, place in places:
        together = meeting_at(event, place)
        counts = {1, together, together + fixed_at(loop, place)}
        found.append(Mark({kind}, place, event.value, counts, signs_of(event), None, event.rational != 0))
    return found


def meetings(loop, event):
    """Breakaway and break-in points; at zero gain there are repeated poles instead."""
    if event.rational == 0:
        return []
    found = []
    for s, together in event.meetings:
        counts = {together, together + fixed_at(loop, s)}
        found.append(Mark(meeting_kinds(loop, event, s, together), s, event.value, counts, signs_of(event)))
    return found


def meeting_kinds(loop, event, s, together):
    """Off the real axis a breakaway; on it the side of the event on which real branches are decides, both for an odd number."""
    if not is_real(s):
        return {"breakaway"}
    if together % 2:
        return {"breakaway", "break-in"}
    q, x = event.value, s.real
    slope = sum((k * q ** (k - 1) * acb_value(p, acb(x)).real for k, p in enumerate(loop.moving) if k), arb(0))
    total = acb_poly([])
    for k, p in enumerate(loop.moving):
        total += acb_poly(p) * acb(q**k)
    for _ in range(together):
        total = total.derivative()
    after = -slope * q * total(acb(x)).real
    if after > 0:
        return {"break-in"}
    return {"breakaway"} if after < 0 else {"breakaway", "break-in"}


def departures(loop):
    """Directions in which branches leave the poles of the open loop."""
    if loop.affine:
        return directions(loop, "departure", loop.moving[0], loop.moving[1])
    return measured(loop)


def directions(loop, kind, home, other):
    """Near an m-fold root p of `home`, home + t·other = 0 gives (s − p)^m = −t·other(p)·m!/home⁽ᵐ⁾(p), t = q or 1/q."""
    found = []
    for place, m in roots(home, EVENT_BITS):
        if place.imag < 0:
            continue
        derivative, factorial = home, 1
        for k in range(m):
            derivative, factorial = derivative.derivative(), factorial * (k + 1)
        power = -acb_value(other, place) * factorial / acb_value(derivative, place)
        vague = openness(loop, place, m)
        for sign, half in ((1, "positive"), (-1, "negative")):
            argument = degrees(power * sign)
            angles = [wrap((argument + 360 * k) / m) for k in range(m)]
            found += fan(loop, kind, place, m, half, angles, arb(0) if kind == "departure" else None, vague)
    return found


def openness(loop, place, m):
    """How far an angle can turn, in degrees, if every pole and zero is rounded to f64: a pole next to a zero is the worst."""
    turn = 0.0
    for part in loop.moving:
        for other, count in roots(part, EVENT_BITS):
            away = abs(other - place)
            if not away.contains(0):
                turn += count * float(((abs(other) + abs(place)) / away).mid()) * EPSILON
    return turn / m * 180 / pi


def fan(loop, kind, place, m, half, angles, at, vague=0.0):
    """One mark for every direction. A record need not say that a simple real pole leaves along the axis, nor how poles leave where
    the knob does not enter once."""
    counts = {m, m + fixed_at(loop, place)}
    plain = is_real(place) and m == 1
    return [Mark({kind}, place, at, counts, {half}, angle, loop.affine and not plain, vague) for angle in angles]


def measured(loop):
    """Departures from the roots at a tiny knob."""
    found = []
    for place, m in roots(loop.moving[0], TINY_BITS):
        if place.imag < 0:
            continue
        for sign, half in ((1, "positive"), (-1, "negative")):
            angles = measured_angles(loop.moving, place, m, sign)
            found += fan(loop, "departure", place, m, half, angles, arb(0))
    return found


def measured_angles(moving, place, m, sign):
    """The directions of the m roots nearest to a pole at a knob of ±10^-TINY."""
    with precision(TINY_BITS):
        near = roots(at_knob(moving, fmpq(sign, 10**TINY)), TINY_BITS)
        offsets = sorted((s - place for s, _ in near), key=lambda off: abs(off).mid())
        return [degrees(off) for off in offsets[:m]]


def degrees(value):
    """Argument in degrees."""
    if value.imag.contains(0) and not value.real.contains(0):
        return 0.0 if value.real > 0 else 180.0
    return float(arb.atan2(value.imag, value.real).mid()) * 180 / pi


def wrap(angle):
    """Into (−180, 180]."""
    angle = (angle + 180) % 360 - 180
    return 180.0 if angle == -180 else angle
