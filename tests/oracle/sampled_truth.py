"""Sampled loops by another way than Stayband's: state equations in ball arithmetic, counts by recursion.

The plant is a companion system with its delay line, moved over a period by ball matrix exponentials (python-flint); the
characteristic polynomial is det(zI - A)·D_C + (det(zI - A + b c) - det(zI - A))·N_C, and its roots outside of the unit
circle are counted by the recursion of Schur and Cohn.
"""

from fractions import Fraction

from flint import acb_poly, arb, arb_mat, arb_poly, ctx, fmpq, fmpq_poly

#: Bits of the ball arithmetic.
BITS = 700


def rational(value):
    """A fraction as flint's rational."""
    value = Fraction(value)
    return fmpq(value.numerator, value.denominator)


def ball(value):
    """A fraction as a ball."""
    return arb(rational(value))


def product(left, right):
    """The product of two polynomials with rational coefficients, lowest power first."""
    result = [Fraction(0)] * (len(left) + len(right) - 1)
    for i, a in enumerate(left):
        for k, b in enumerate(right):
            result[i + k] += Fraction(a) * Fraction(b)
    return result


class Plant:
    """above/below in s, with a delay, behind a hold: x+ = A x + b u, y = c x + d u."""

    def __init__(self, above, below, period, delay):
        ctx.prec = BITS
        order = len(below) - 1
        above = [Fraction(c) for c in above] + [Fraction(0)] * (order + 1 - len(above))
        below = [Fraction(c) for c in below]
        direct = above[order] / below[order]
        row = [(above[i] - direct * below[i]) / below[order] for i in range(order)]
        matrix = [[ball(0)] * (order + 1) for _ in range(order + 1)]
        for i in range(order - 1):
            matrix[i][i + 1] = ball(1)
        for i in range(order):
            matrix[order - 1][i] = ball(-below[i] / below[order])
        if order:
            matrix[order - 1][order] = ball(1)

        def moved(time):
            power = (arb_mat(matrix) * ball(time)).exp()
            phi = [[power[i, k] for k in range(order)] for i in range(order)]
            return phi, [power[i, order] for i in range(order)]

        whole = int(delay / period)
        fraction = delay - whole * period
        phi, gamma = moved(period)
        line = whole + (1 if fraction else 0)
        size = order + line
        self.a = [[ball(0)] * size for _ in range(size)]
        self.b = [ball(0)] * size
        self.c = [ball(c) for c in row] + [ball(0)] * line
        self.d = ball(0)
        for i in range(order):
            for k in range(order):
                self.a[i][k] = phi[i][k]
        # The line's places hold u one, two, ... periods old.
        for i in range(1, line):
            self.a[order + i][order + i - 1] = ball(1)
        if line:
            self.b[order] = ball(1)
        newer = moved(period - fraction)[1] if fraction else gamma

        def feed(age, weights):
            for i in range(order):
                if age == 0:
                    self.b[i] += weights[i]
                else:
                    self.a[i][order + age - 1] += weights[i]

        feed(whole, newer)
        if fraction:
            feed(whole + 1, [g - n for g, n in zip(gamma, newer)])
        if line:
            self.c[order + line - 1] += ball(direct)
        else:
            self.d = ball(direct)
        self.size = size

    def polynomials(self):
        """Numerator and denominator in z, as ball polynomials."""
        ctx.prec = BITS
        if self.size == 0:
            return arb_poly([self.d]), arb_poly([ball(1)])
        below = arb_mat(self.a).charpoly()
        changed = [[self.a[i][k] - self.b[i] * self.c[k] for k in range(self.size)] for i in range(self.size)]
        above = arb_mat(changed).charpoly() - below
        return above + below * arb_poly([self.d]), below


def controller(above, below, method, period, prewarp=None):
    """A controller in s (knob taken out), lowest power first, as numerator and denominator in z."""
    ctx.prec = BITS
    degree = max(len(above), len(below)) - 1
    if method == "in z":
        return polynomial(above), polynomial(below)
    if method == "matched":
        return matched(above, below, period)
    if method == "tustin":
        factor, below_s = ball(2 / period), [1, 1]
    elif method == "tustin-prewarped":
        angle = ball(prewarp) * ball(period) / 2
        factor, below_s = ball(prewarp) / angle.tan(), [1, 1]
    else:
        factor, below_s = ball(1 / period), [0, 1]

    def image(coefficients):
        total = arb_poly([0])
        for i, c in enumerate(coefficients):
            total += arb_poly([ball(c) * factor**i]) * arb_poly([-1, 1]) ** i * arb_poly(below_s) ** (degree - i)
        return total

    return image(above), image(below)


def polynomial(coefficients):
    """A ball polynomial from fractions."""
    return arb_poly([ball(c) for c in coefficients])


def matched(above, below, period):
    """Roots r go to e^(r h), missing zeros to -1, the gain is kept at low frequency."""

    def image(coefficients):
        zeros = next(i for i, c in enumerate(coefficients) if c)
        rest = [Fraction(c) for c in coefficients[zeros:]]
        total = acb_poly([1])
        for root, multiplicity in roots_of(rest):
            total *= acb_poly([-(root * ball(period)).exp(), 1]) ** multiplicity
        real = arb_poly([total[i].real for i in range(len(rest))])
        return zeros, rest[0], real

    missing = len(below) - len(above)
    (upper_zeros, upper_low, upper), (lower_zeros, lower_low, lower) = image(above), image(below)
    step = arb_poly([-1, 1]) * arb_poly([1 / ball(period)])
    upper *= arb_poly([ball(upper_low) / (upper(arb(1)) * arb(2) ** missing)]) * arb_poly([1, 1]) ** missing
    lower *= arb_poly([ball(lower_low) / lower(arb(1))])
    return upper * step**upper_zeros, lower * step**lower_zeros


def roots_of(coefficients):
    """The complex roots of an exact polynomial with their multiplicities."""
    if len(coefficients) == 1:
        return []
    return [(root, multiplicity) for root, multiplicity in fmpq_poly([rational(c) for c in coefficients]).complex_roots()]


class Truth:
    """F(z, q) = D + q·N, and certain counts of its roots outside of the unit circle."""

    def __init__(self, case):
        plant = Plant(case.plant_above, case.plant_below, case.period, case.delay)
        above, below = plant.polynomials()
        n, d = controller(case.controller_above, case.controller_below, case.method, case.period, case.prewarp)
        self.d, self.n = d * below, n * above
        fixed = case.fixed_above
        if fixed is not None:
            m, e = controller(*fixed, case.method, case.period, case.prewarp)
            self.d, self.n = (below * e + above * m) * d, n * above * e

    def outside(self, q):
        """Roots outside of the unit circle; None where that cannot be told."""
        ctx.prec = BITS
        f = self.d + self.n * arb_poly([ball(q)])
        coefficients = [f[i] for i in range(f.degree() + 1)]
        # Poles at z = 0 from the delay line.
        while coefficients and coefficients[0].contains(0):
            coefficients.pop(0)
        while coefficients and coefficients[-1].contains(0):
            if not (coefficients[-1].rad() < 1e-100):
                return None
            coefficients.pop()
        return outside(coefficients)


def outside(a):
    """Roots outside of the unit circle by the recursion of Schur and Cohn (M. Marden, Geometry of Polynomials, American
    Mathematical Society 1966, section 43), in ball arithmetic; None where a comparison stays open."""
    degree, sign = len(a) - 1, 1
    total = 0
    while degree > 0:
        if abs(a[degree]) < abs(a[0]):
            # Reversing exchanges inside and outside.
            total, sign = total + sign * degree, -sign
            a = a[::-1]
        elif not abs(a[degree]) > abs(a[0]):
            return None
        first, last = a[0], a[degree]
        a = [(last * a[i] - first * a[degree - i]) / last for i in range(1, degree + 1)]
        degree -= 1
    return total
