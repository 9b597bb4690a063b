"""Roots of real functions between two places of opposite sign, in high precision."""

from flint import arb

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
