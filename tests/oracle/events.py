"""Every value of the knob at which something happens to the poles: they reach the imaginary axis, or meet, or pass infinity.

Affine knob, F = D + qN with gcd(D, N) taken out: axis events from the positive roots x = w² of De·No − Do·Ne, meetings from the
roots of D′N − DN′, each with q = −D/N there. Higher degree in the knob: both variables are eliminated in turn by resultants, and
the roots of the two resultants are paired by evaluating the system at each pair. All polynomials are exact; only their roots are
balls, of `EVENT_BITS` bits, and two balls that overlap at that width are taken as one number.

Known limit: a loop of degree above one in the knob whose even and odd parts share a factor is refused.
"""

from dataclasses import dataclass, field
from fractions import Fraction

from flint import Ordering, arb, acb, fmpq, fmpq_poly, fmpz, fmpz_mpoly_ctx, fmpz_poly

import certified
from certified import Kinds, is_real, precision, roots
from polynomials import at_knob, fraction_of

#: Bits of an event's ball. Order 40 with clustered roots loses some 300 of them.
EVENT_BITS = 900
#: A pair (root, knob) solves a system if its residual is below 2^-RESIDUAL_BITS of its terms.
RESIDUAL_BITS = 300
#: Denominator up to which an event is recognised as a rational number.
LARGEST_DENOMINATOR = 1 << 300
#: A rational of denominator d counts only in a ball narrower than 2^-CHANCE_BITS / d², where hardly any lies by chance.
CHANCE_BITS = 100
#: At an irrational event the knob is rounded to so many bits, and roots nearer than this, relative, are taken for one: m-fold roots are
#: off by 2^-(bits / m). The finer rounding is for events at which the coarse one sees more roots meet than there should.
ROUNDINGS = ((480, arb(2) ** -75), (880, arb(2) ** -210))


@dataclass
class Event:
    """One value of the knob and what happens there."""

    value: arb
    rational: fmpq | None = None
    omegas: list = field(default_factory=list)
    origin: bool = False
    drop: bool = False
    meetings: list = field(default_factory=list)  # of (s ball, how many poles)
    state: Kinds | None = None

    @property
    def on_axis(self):
        return bool(self.omegas) or self.origin or self.drop

    @property
    def real_meetings(self):
        return [(s, m) for s, m in self.meetings if is_real(s)]


def events(characteristic):
    """All events in ascending order, each with the state of the poles exactly there."""
    with precision(EVENT_BITS):
        moving = characteristic.moving
        found = [Event(q, origin=True) for q in knob_roots([p[0] for p in moving])]
        top = max(p.degree() for p in moving)
        found += [Event(q, drop=True) for q in knob_roots([p[top] for p in moving])]
        if characteristic.affine:
            found += affine_axis(*moving) + affine_meetings(*moving)
        elif characteristic.knob_degree > 1:
            found += general_axis(moving) + general_meetings(moving)
        merged = merge(found)
        for event in merged:
            event.rational = as_rational(event.value)
            if event.rational is not None:
                event.value = arb(event.rational)
            event.state = state_at(characteristic, event)
        return merged


def knob_roots(coefficients):
    """Real roots of a polynomial in the knob."""
    return [ball.real for ball, _ in roots(fmpz_poly(coefficients), EVENT_BITS) if is_real(ball)]


def merge(found):
    """Sorts events and joins those at the same value."""
    found.sort(key=lambda event: event.value.mid())
    merged = []
    for event in found:
        if merged and merged[-1].value.overlaps(event.value):
            last = merged[-1]
            last.omegas += [w for w in event.omegas if not any(w.overlaps(v) for v in last.omegas)]
            last.meetings += event.meetings
            last.origin |= event.origin
            last.drop |= event.drop
        else:
            merged.append(event)
    for event in merged:
        event.omegas.sort(key=lambda w: w.mid())
    return merged


def as_rational(ball):
    """The rational number in the ball, if there is one of moderate size."""
    if ball.contains(0):
        return fmpq(0)
    middle = fraction_of(exact(ball))
    scale = 1 << max(0, -exponent(middle))
    candidate = (middle * scale).limit_denominator(LARGEST_DENOMINATOR) / scale
    guess = fmpq(candidate.numerator, candidate.denominator)
    by_chance = ball.rad() * scale * (candidate * scale).denominator ** 2 * 2**CHANCE_BITS > 1
    return guess if (ball - arb(guess)).contains(0) and not by_chance else None


def exponent(fraction):
    """The binary exponent, 0 for 0."""
    return abs(fraction.numerator).bit_length() - fraction.denominator.bit_length() if fraction else 0


def exact(ball):
    """The midpoint of a ball as a rational."""
    mantissa, power = ball.mid().man_exp()
    return fmpq(mantissa) * fmpq(2) ** int(power)


def without(poly, factor):
    """The polynomial with every factor it shares with the other divided out."""
    while (common := poly.gcd(factor)).degree() > 0:
        poly //= common
    return poly


# Affine knob.


def affine_axis(d, n):
    """Pole pairs on the axis of D + qN, both coprime."""
    (d_even, d_odd), (n_even, n_odd) = certified.even_odd(d), certified.even_odd(n)
    contact = d_even * n_odd - d_odd * n_even
    if contact == 0:
        return always_symmetric((d_even, n_even) if (d_even != 0 or n_even != 0) else (d_odd, n_odd))
    contact = without(contact, n_even.gcd(n_odd))
    found = []
    for ball, _ in roots(contact, EVENT_BITS):
        x = ball.real
        if not is_real(ball) or not x > 0:
            continue
        even, odd = n_even(x), n_odd(x)
        use_odd = even.contains(0) or (not odd.contains(0) and abs(odd) > abs(even))
        q = -d_odd(x) / odd if use_odd else -d_even(x) / even
        found.append(Event(q, omegas=[x.sqrt()]))
    return found


def always_symmetric(part):
    """Even and odd parts are proportional: pole pairs lie on the axis for whole ranges and leave it where x is double."""
    common = part[0].gcd(part[1])
    d, n = part[0] // common, part[1] // common
    found = []
    for ball, _ in roots(without(d.derivative() * n - d * n.derivative(), n), EVENT_BITS):
        if is_real(ball) and ball.real > 0:
            found.append(Event(-d(ball.real) / n(ball.real), omegas=[ball.real.sqrt()]))
    return found


def affine_meetings(d, n):
    """Points where poles of D + qN coincide, in the upper half plane or on the real axis, at a real q."""
    meeting = d.derivative() * n - d * n.derivative()
    if meeting == 0:
        return []
    found = []
    for s, multiplicity in roots(without(meeting, n), EVENT_BITS):
        if s.imag < 0:
            continue
        q = -acb_value(d, s) / acb_value(n, s)
        if is_real(s) or q.imag.contains(0):
            found.append(Event(q.real, meetings=[(s, multiplicity + 1)]))
    return found


def acb_value(poly, s):
    """The value of an integer polynomial at a ball."""
    total = acb(0)
    for c in reversed(poly.coeffs()):
        total = total * s + c
    return total


# Any degree in the knob.

_PLANE = fmpz_mpoly_ctx.get(["x", "q"], Ordering.lex)


def plane(powers):
    """Σ q^k powers[k](x) as a polynomial in two variables."""
    terms = {(i, k): c for k, p in enumerate(powers) for i, c in enumerate(p.coeffs()) if c != 0}
    return _PLANE.from_dict(terms)


def univariate(poly, variable):
    """A polynomial that has only this variable left."""
    coefficients = [fmpz(0)] * (poly.degrees()[variable] + 1) if poly != 0 else []
    for powers, c in poly.to_dict().items():
        coefficients[powers[variable]] = c
    return fmpz_poly(coefficients)


def common_points(first, second):
    """Balls (x, q), q real, at which two coprime polynomials vanish, with the multiplicity of x in its eliminant."""
    in_x = univariate(first.resultant(second, "q"), 0)
    in_q = univariate(first.resultant(second, "x"), 1)
    if in_x == 0 or in_q == 0:
        raise ArithmeticError("the two curves have a common part")
    found = []
    for q, _ in roots(in_q, EVENT_BITS):
        if not is_real(q):
            continue
        for x, multiplicity in roots(in_x, EVENT_BITS):
            if vanishes(first, x, q) and vanishes(second, x, q):
                found.append((x, q.real, multiplicity))
    return found


def vanishes(poly, x, q):
    """True if the value at the pair is zero as far as the balls tell."""
    total, size = acb(0), arb(0)
    for (i, k), c in poly.to_dict().items():
        term = x**i * q**k * c
        total += term
        size += abs(term)
    return total.real.contains(0) and total.imag.contains(0) and bool(abs(total) <= size * arb(2) ** -RESIDUAL_BITS)


def general_axis(moving):
    """Pole pairs on the axis, any degree in the knob."""
    halves = [certified.even_odd(p) for p in moving]
    even, odd = plane([e for e, _ in halves]), plane([o for _, o in halves])
    if even == 0 or odd == 0 or even.gcd(odd).total_degree() > 0:
        raise ArithmeticError("even and odd parts share a factor: not covered above degree one in the knob")
    return [Event(q, omegas=[x.real.sqrt()]) for x, q, _ in common_points(even, odd) if is_real(x) and x.real > 0]


def general_meetings(moving):
    """Points where poles coincide at a real knob, any degree in the knob. Multiplicity by the derivatives that vanish."""
    first, second = plane(moving), plane([p.derivative() for p in moving])
    found = []
    for s, q, _ in common_points(first, second):
        if s.imag < 0:
            continue
        multiplicity, higher = 2, second
        while vanishes(higher := higher.derivative("x"), s, acb(q)):
            multiplicity += 1
        found.append(Event(q, meetings=[(s, multiplicity)]))
    return found


# What the poles are like exactly at an event.


def state_at(characteristic, event):
    """Counts exactly at the event: by exact arithmetic where it is rational, else by roots that coincide as far as one can see."""
    if event.rational is not None:
        return certified.kinds(characteristic.at(event.rational))
    for bits, coincident in ROUNDINGS:
        with precision(bits):
            near = exact(+event.value)
        kinds, doubtful = clustered_kinds(roots(at_knob(characteristic.powers, near), 2 * bits), event, coincident)
        if not doubtful:
            break
    return kinds


def clustered_kinds(found, event, coincident):
    """Counts where roots nearer than this to the axis, to the real line or to each other are there; roots that small or large are at
    the origin or infinity if the event says so. Doubtful if more roots meet than the event explains."""
    sizes = sorted(abs(s).mid() for s, _ in found)
    middle = sizes[len(sizes) // 2]
    listed = [s for s, m in found for _ in range(m) if not (event.drop and abs(s) > middle / coincident)]
    at_origin = [s.is_zero() or bool(event.origin and abs(s) < middle * coincident) for s in listed]
    near_origin = [s for s, here in zip(listed, at_origin) if here]
    rest = [s for s, here in zip(listed, at_origin) if not here]
    on_axis = [s for s in rest if abs(s.real) < abs(s) * coincident]
    right = sum(1 for s in rest if s.real > abs(s) * coincident)
    real = [s for s in rest if abs(s.imag) < abs(s) * coincident]
    count_axis, count_real = len(on_axis) + len(near_origin), len(real) + len(near_origin)
    pairs = (len(listed) - count_real) // 2
    repeated_real = coincide(real, coincident)
    if right or len(near_origin) > 1 or coincide(on_axis, coincident):
        word = "unstable"
    elif count_axis:
        word = "marginally stable"
    elif pairs:
        word = "underdamped"
    else:
        word = "critically damped" if repeated_real else "overdamped"
    doubtful = len(on_axis) > 2 * len(event.omegas) or repeated_real and not event.real_meetings
    return Kinds(right, count_axis, count_real, pairs, word), doubtful


def coincide(listed, coincident):
    """True if two of the roots are one."""
    return any(abs(a - b) < abs(a) * coincident for i, a in enumerate(listed) for b in listed[:i])
