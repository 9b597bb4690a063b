"""High precision: roots of polynomials, and of real functions between two places of opposite sign."""

from flint import acb, arb

#: Bits of all ball arithmetic with responses.
BITS = 220

#: Steps; bisection alone would need some 200 for all bits, the chord rule some ten.
MOST_STEPS = 140
#: Relative width at which a root is good: far below any tolerance.
WIDTH = arb(10) ** -22


def middle(ball):
    """The ball's middle as an exact number, so that comparisons decide."""
    return ball.mid()


def axis_root(f, a, b):
    """A root of f between a and b. The chord rule, with the value at an end that stays halved, and bisection every fourth step."""
    a, b = arb(a), arb(b)
    fa, fb = f(a), f(b)
    if fa == 0 or fb == 0 or (fa > 0) == (fb > 0):
        return a if abs(fa) < abs(fb) else b
    side = 0
    for step in range(MOST_STEPS):
        if abs(b - a) <= WIDTH * (abs(a) + abs(b)):
            break
        m = (a + b) / 2 if step % 4 == 3 else (a * fb - b * fa) / (fb - fa)
        m = m.mid()
        fm = f(m)
        if fm == 0:
            return m
        if (fm > 0) == (fb > 0):
            b, fb = m, fm
            fa = fa / 2 if side == 1 else fa
            side = 1
        else:
            a, fa = m, fm
            fb = fb / 2 if side == -1 else fb
            side = -1
    return ((a + b) / 2).mid()


def roots(poly):
    """Roots of a rational polynomial as balls, each as often as it occurs."""
    if poly.degree() < 1:
        return []
    return [ball for ball, count in poly.numer().complex_roots() for _ in range(count)]


def value(poly, z):
    """A rational polynomial at a ball."""
    total = acb(0)
    for c in reversed(poly.coeffs()):
        total = total * z + acb(c)
    return total
