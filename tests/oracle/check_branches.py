"""Branches: as many as the order, each from pole to zero or out of view, every vertex a pole, no swaps, close to the curve.

Fixed modes are branches that stand still; they are taken out first. A segment between two vertices is proven to follow one root, or,
where it begins, ends or passes at a multiple point, to stay among the roots that meet there. Between two multiple points one sample
of the knob then suffices to show that no two branches follow the same root and no root in the view is left out.
"""

from dataclasses import dataclass

import numpy as np
from flint import acb, arb, fmpq

import tolerances
from certified import precision, roots
from polynomials import at_knob
from tracking import FOLLOW_BITS, Fast, Follower, Lost, fraction, reversed_knob

#: A multiple point belongs to a segment if its knob is within this of the ends, relative: the stated knob is rounded.
AT_MEETING = fmpq(1, 10**15)
#: Quarterings of the knob towards a multiple point before a segment is given up.
QUARTERINGS = 80
#: A root that meets others comes at least this factor nearer with each quartering: 4^(-1/m) for m of them, m up to 40.
APPROACH = 0.99
#: Vertices tried outwards from a segment until one has a root of its own.
STEPS_OUTWARDS = 12
#: Radii of the disc around a multiple point, in distances of the farther vertex.
MEETING_RADII = (1.05, 1.4, 2.0, 3.5)
#: Factor by which the view is shrunk when a missing root is looked for: a branch may end right at its border.
INNER_VIEW = 0.999
#: Vertices at the end of a branch that are farther out than this many views are left unchecked: nobody sees them, and f64 overflows.
FAR_OUT = 1e4
#: Bits of the true roots.
BITS = 128


@dataclass
class Meeting:
    """A multiple point of the moving part: where, at which knob, how many."""

    place: acb
    knob: object  # arb; or None at infinity
    count: int


class Picture:
    """The default view, in pixels."""

    def __init__(self, view):
        (self.left, self.right), (self.low, self.high) = view["re"], view["im"]
        self.scale = np.array([tolerances.PICTURE / (self.right - self.left), tolerances.PICTURE / (self.high - self.low)])
        self.size = max(self.right - self.left, self.high - self.low)

    def shows(self, s, shrink=1.0):
        """True for points in the view."""
        re, im = (self.left + self.right) / 2, (self.low + self.high) / 2
        wide, tall = (self.right - self.left) / 2 * shrink, (self.high - self.low) / 2 * shrink
        return (abs(np.real(s) - re) <= wide) & (abs(np.imag(s) - im) <= tall)

    def may_show(self, start, end):
        """True for segments whose surroundings reach into the view."""
        room = abs(end - start)
        wide = (np.minimum(start.real, end.real) - room <= self.right) & (np.maximum(start.real, end.real) + room >= self.left)
        return wide & (np.minimum(start.imag, end.imag) - room <= self.high) & (np.maximum(start.imag, end.imag) + room >= self.low)

    def pixels_to_chord(self, s, start, end):
        """Distance of points from segments, in pixels."""
        def place(z):
            return np.stack([np.real(z), np.imag(z)], axis=-1) * self.scale

        point, a, along = place(s), place(start), place(end) - place(start)
        length = (along**2).sum(axis=-1)
        share = np.clip(np.where(length > 0, ((point - a) * along).sum(axis=-1) / length, 0), 0, 1)
        return np.sqrt(((point - a - along * share[..., None]) ** 2).sum(axis=-1))


def check_branches(case, truth, record, branches, report):
    """All branches of both halves."""
    loop = case.loop
    if loop.knob_degree == 0:
        for sign in ("positive", "negative"):
            own = [b for b in branches if b["sign"] == sign]
            report.equal(f"branches {sign}: number", loop.order, len(own))
        return
    meetings = [Meeting(s, e.value, m) for e in truth for s, m in e.meetings]
    meetings += [Meeting(z, None, m) for z, m in roots(loop.moving[-1], FOLLOW_BITS) if m > 1]
    meetings += [Meeting(m.place.conjugate(), m.knob, m.count) for m in meetings if m.place.imag > 0]
    drops = [e.value for e in truth if e.drop]
    for sign in ("positive", "negative"):
        own = [b["points"] for b in branches if b["sign"] == sign]
        allowed = {loop.order, loop.order + passing(loop, truth, sign)}
        report.check(len(own) in allowed, f"branches {sign}: number", allowed, len(own))
        Half(loop, sign, meetings, drops, Picture(record["view"]), report).check(own)


def check_drawn(record, report):
    """No half of the locus is left out, with or without a word; quick enough for every loop."""
    left_out = [n["text"] for n in record["notices"] if n["kind"] == "not-computed" and "half of the locus" in n["text"]]
    report.equal("branches: both halves drawn", [], left_out)


def passing(loop, truth, sign):
    """Poles that pass infinity at a knob of this sign: each may end one branch and begin another."""
    half = [e for e in truth if e.drop and (e.value > 0 if sign == "positive" else e.value < 0)]
    return sum(loop.order - e.state.real - 2 * e.state.pairs for e in half)


def s_of(track, i):
    """Place and knob of a vertex."""
    return track.s[i], track.q[i]


class Half:
    """The branches of one sign of the knob."""

    def __init__(self, loop, sign, meetings, drops, picture, report):
        self.moving = loop.moving
        self.fixed = loop.fixed
        self.sign = 1 if sign == "positive" else -1
        self.name = f"branches {sign}"
        self.meetings = [m for m in meetings if m.knob is None or not m.knob * self.sign < 0]
        self.drops = [d for d in drops if not d * self.sign < 0]
        self.picture = picture
        self.report = report
        self.fast = Fast(loop.moving)
        self.slow = Follower(loop.moving)
        self.slow_end = Follower(reversed_knob(loop.moving))

    def check(self, listed):
        tracks = self.without_fixed([Track(points) for points in listed])
        for number, track in enumerate(tracks):
            track.number = number
            self.check_order(track)
            self.check_ends(track)
            track.cut(FAR_OUT * self.picture.size)
            self.check_vertices(track)
            self.check_segments(track)
        self.check_all_different(tracks)

    def without_fixed(self, tracks):
        """Takes out one standing branch for every fixed mode."""
        for ball, m in roots(self.fixed):
            place = complex(ball.real.mid(), ball.imag.mid())
            for _ in range(m):
                still = next((t for t in tracks if t.stands_at(place, self.picture.size)), None)
                if self.report.check(still is not None, f"{self.name}: standing branch", place, "none"):
                    tracks = [t for t in tracks if t is not still]
        return tracks

    def check_order(self, track):
        """|knob| grows along the branch, from zero, or from a knob at which a pole passes infinity."""
        knobs = track.q * self.sign
        at_zero = len(knobs) > 1 and knobs[0] == 0
        late = any(abs(float(d.mid())) <= knobs[0] for d in self.drops) and not self.picture.shows(track.s[0])
        self.report.check(at_zero or late, f"{self.name} {track.number}: begins at zero gain", 0, (track.s[:1], track.q[:1]))
        # Two multiple points closer than f64 resolves may stand at one knob.
        self.report.check(bool((np.diff(knobs) >= 0).all()), f"{self.name} {track.number}: |knob| grows", "ascending", track.q)

    def check_ends(self, track):
        """The last vertex is a zero or out of view."""
        last = track.s[-1]
        if track.into_zero:
            away = min((abs(acb(last) - z).mid() for z, _ in roots(self.moving[-1], BITS)), default=arb("inf"))
            good = away <= tolerances.VERTEX_PLACE * self.scale(last)
            self.report.check(good, f"{self.name} {track.number}: ends in a zero", "a zero", last)
        else:
            gone = not np.isfinite(last) or not self.picture.shows(last)
            self.report.check(gone, f"{self.name} {track.number}: ends in a zero or out of view", "out of view", (last, track.q[-1]))

    def scale(self, s):
        return np.maximum(abs(s), self.picture.size)

    def check_vertices(self, track):
        """Every vertex is a pole."""
        finite = track.finite & np.isfinite(track.q)
        s, q = track.s[finite], track.q[finite]
        good = self.fast.root_distance(s, q) <= tolerances.VERTEX_PLACE * self.scale(s)
        for i in np.flatnonzero(~good):
            good[i] = self.is_pole(s[i], q[i])
        bad = np.flatnonzero(~good)
        shown = [(s[i], q[i]) for i in bad[:3]]
        self.report.check(len(bad) == 0, f"{self.name} {track.number}: vertices are poles", f"0 of {len(s)} off", f"{len(bad)}: {shown}")

    def is_pole(self, s, q):
        """The same with exact arithmetic; or exactly a pole at a knob that rounds to the stated one."""
        exact = fraction(q)
        found = roots(at_knob(self.moving, exact), BITS)
        with precision(FOLLOW_BITS):
            away = min((abs(ball - acb(s)).mid() for ball, _ in found), default=arb("inf"))
            if away <= tolerances.VERTEX_PLACE * float(self.scale(s)):
                return True
            values = [p(acb(s)) for p in self.slow.polys]
            total = sum((v * arb(exact) ** k for k, v in enumerate(values)), acb(0))
            slope = sum((v * k * arb(exact) ** (k - 1) for k, v in enumerate(values) if k), acb(0))
            return bool(abs(total) <= abs(slope) * abs(arb(exact)) * tolerances.VERTEX_KNOB)

    def check_segments(self, track):
        """Each segment follows one root, and the curve stays next to it."""
        usable = track.finite[:-1] & track.finite[1:]
        plain = usable & np.isfinite(track.q[1:])
        # A vertex at infinity or a knob at infinity belongs to no piece.
        at = np.flatnonzero(plain)
        begin = int(at[0]) if len(at) else 0
        end = int(at[-1]) + 2 if len(at) else 0
        track.pieces, open_ones = self.fast.pieces(track.s[begin:end], track.q[begin:end])
        track.pieces.segment += begin
        lost = [i for i in np.flatnonzero(~usable) if not self.passes_infinity(track, i)]
        reasons = [f"{track.s[i]}, {track.s[i + 1]}, knob {track.q[i]}" for i in lost]
        for first, last in runs(np.union1d(open_ones + begin, np.flatnonzero(usable & ~plain))):
            try:
                good, reason = self.follows(track, first, last), "another root"
            except Lost as lost_root:
                good, reason = False, str(lost_root)
            if not good and not (self.undecided(s_of(track, first)) or self.undecided(s_of(track, last))):
                reasons.append(f"{track.s[first]} to {track.s[last]}, knob {track.q[first]} to {track.q[last]}: {reason}")
        self.report.check(not reasons, f"{self.name} {track.number}: follows one root", f"0 of {len(plain)} lost", reasons[:3])
        self.check_sagitta(track, plain)

    def undecided(self, vertex):
        """True where two true roots are so near to each other that f64 vertices cannot tell which is which."""
        s, q = vertex
        if not np.isfinite(q):
            return False
        near = sorted(abs(complex(ball.real.mid(), ball.imag.mid()) - s) for ball, _ in roots(at_knob(self.moving, fraction(q)), BITS))
        return len(near) > 1 and near[1] <= tolerances.TOO_NEAR * abs(s)

    def follows(self, track, first, last):
        """From one vertex to another in ball arithmetic: through a multiple point, past infinity, or along one root."""
        first, last = self.single_vertices(track, first, last)
        s0, s1, q0, q1 = track.s[first], track.s[last], track.q[first], track.q[last]
        if np.isfinite(q1):
            low, high, follower = fraction(q0), fraction(q1), self.slow
        elif q0 != 0:
            low, high, follower = 1 / fraction(q0), fmpq(0), self.slow_end
        else:
            halfway = fmpq(self.sign)
            s0 = self.slow.follow(s0, fmpq(0), halfway)
            low, high, follower = 1 / halfway, fmpq(0), self.slow_end
        met = self.meetings_between(low, high, np.isfinite(q1))
        if np.isfinite(q1) and any(self.within_meeting(m, s0, s1, low, high) for m in self.meetings):
            return True
        if self.through_meetings(follower, met, s0, s1, low, high) or self.passes_infinity(track, first):
            return True
        end = follower.follow(s0, low, high)
        return bool(abs(end - acb(s1)) <= tolerances.VERTEX_PLACE * float(self.scale(s1))) or self.same_at(follower, end, s1, high)

    def single_vertices(self, track, first, last):
        """The nearest vertices outwards whose root can be told from its neighbours: next to a near miss it cannot."""
        for _ in range(STEPS_OUTWARDS):
            if first == 0 or not track.finite[first - 1] or self.is_single(track, first):
                break
            first -= 1
        for _ in range(STEPS_OUTWARDS):
            if last + 1 >= len(track.s) or not track.finite[last + 1] or self.is_single(track, last):
                break
            last += 1
        return first, last

    def is_single(self, track, i):
        """True if the vertex has a root of its own next to it."""
        if not np.isfinite(track.q[i]):
            return True
        try:
            with precision(FOLLOW_BITS):
                self.slow.settle(acb(track.s[i]), fraction(track.q[i]))
            return True
        except Lost:
            return False

    def same_at(self, follower, end, s1, q1):
        """True if the root is the one nearest to the vertex."""
        with precision(FOLLOW_BITS):
            return bool(abs(follower.newton(acb(s1), q1) - end) <= abs(end) * arb(2) ** -100)

    def through_meetings(self, follower, met, s0, s1, low, high):
        """True if both ends are among roots that meet on the way."""
        with precision(FOLLOW_BITS):
            knobs = [(m, fraction_near(knob, min(low, high), max(low, high))) for m, knob in met]
            reach = 4 * abs(acb(s1) - acb(s0)) + tolerances.VERTEX_PLACE * self.picture.size

            def reaches(s, q):
                near = [(m, knob) for m, knob in knobs if abs(m.place - acb(s)) < reach]
                return any(self.joins(follower, m, s, q, knob) for m, knob in near)

            return bool(knobs) and reaches(s0, low) and reaches(s1, high)

    def meetings_between(self, low, high, finite):
        """Multiple points whose knob lies on the segment, with the knob in the segment's own terms."""
        first, last = min(low, high), max(low, high)
        found = []
        with precision(FOLLOW_BITS):
            for meeting in self.meetings:
                if meeting.knob is None:
                    knob = None if finite else arb(0)
                elif finite:
                    knob = meeting.knob
                else:
                    knob = None if meeting.knob.contains(0) else 1 / meeting.knob
                if knob is None:
                    continue
                slack = abs(knob) * arb(AT_MEETING)
                if not (knob + slack < arb(first)) and not (knob - slack > arb(last)):
                    found.append((meeting, knob))
        return found

    def within_meeting(self, meeting, s0, s1, low, high):
        """True so close to a multiple point that nobody can tell its branches apart."""
        room = tolerances.VERTEX_PLACE * self.picture.size
        with precision(FOLLOW_BITS):
            if meeting.knob is None or not all(bool(abs(acb(s) - meeting.place) < room) for s in (s0, s1)):
                return False
            return self.slow.holds(meeting.place, low, high, meeting.count, room)

    def joins(self, follower, meeting, s, q, knob):
        """True if the root next to s is one of those that meet, followed from q to the knob of the meeting."""
        place, away = acb(s), abs(acb(s) - meeting.place)
        for _ in range(QUARTERINGS):
            if abs(q - knob) <= abs(knob) * AT_MEETING and away <= tolerances.VERTEX_PLACE * float(self.scale(s)):
                return True
            if q == knob:
                return False
            if any(follower.holds(meeting.place, q, knob, meeting.count, away * factor) for factor in MEETING_RADII):
                return True
            nearer = knob + (q - knob) / 4
            try:
                place, q = follower.follow(place, q, nearer), nearer
            except Lost:
                return False
            before, away = away, abs(place - meeting.place)
            # Beside a pole and a zero that nearly cancel a root may stand still until the very end.
            if away > before * APPROACH and away > tolerances.VERTEX_PLACE * float(self.scale(s)):
                return False
        return False

    def passes_infinity(self, track, i):
        """True for a segment out of view on both sides of a knob at which a pole passes infinity."""
        s, q = track.s[i : i + 2], np.sort(track.q[i : i + 2])
        out = all(not np.isfinite(z) or not self.picture.shows(z) for z in s)
        return out and any(not (d < arb(q[0])) and not (d > arb(q[1])) for d in self.drops)

    def check_sagitta(self, track, plain):
        """The true root between two vertices is within a quarter pixel of the chord."""
        worst, where = 0.0, None
        for at, q in self.between(track, np.flatnonzero(plain & self.picture.may_show(track.s[:-1], track.s[1:]))):
            s = self.roots_between(track, at, q)
            seen = self.picture.shows(s) & np.isfinite(s)
            far = np.where(seen, self.picture.pixels_to_chord(s, track.s[at], track.s[at + 1]), 0)
            if len(far) and far.max() > worst:
                k = int(far.argmax())
                worst, where = float(far[k]), (track.s[at[k]], track.s[at[k] + 1], q[k], s[k])
        good = worst <= tolerances.SAGITTA
        self.report.check(good, f"{self.name} {track.number}: polyline", f"within {tolerances.SAGITTA} px", (worst, where))

    def between(self, track, at):
        """Knobs inside the segments: arithmetic and geometric middles, and where the root is next to the chord's middle."""
        low, high = track.q[at], track.q[at + 1]
        yield at, (low + high) / 2
        some = (low != 0) & (abs(high) > 1.5 * abs(low))
        yield at[some], self.sign * np.sqrt(abs(low[some])) * np.sqrt(abs(high[some]))
        for share in (0.25, 0.5, 0.75):
            yield at, self.fast.turning(track.s[at] + share * (track.s[at + 1] - track.s[at]), low, high)

    def roots_between(self, track, at, q):
        """The branch's root at a knob inside each segment."""
        pieces = track.pieces
        index = np.clip(np.searchsorted(abs(pieces.q0), abs(q), side="right") - 1, 0, None)
        if not len(pieces.q0):
            return np.array([self.exact_root_between(track, i, k) for i, k in zip(at, q)])
        inside = (pieces.segment[index] == at) & (abs(q) <= abs(pieces.q1[index]))
        low, high = pieces.q0[index], pieces.q1[index]
        share = np.clip(np.where(high != low, (q - low) / (high - low), 0), 0, 1)
        s = self.fast.newton(pieces.s0[index] + share * (pieces.s1[index] - pieces.s0[index]), q)
        sure = inside & (abs(s - pieces.center[index]) + self.fast.root_distance(s, q) < pieces.radius[index])
        for k in np.flatnonzero(~sure):
            s[k] = self.exact_root_between(track, at[k], q[k])
        return s

    def exact_root_between(self, track, i, q):
        """The same, followed from an end; at a multiple point the nearest root to the chord."""
        for end in (i, i + 1):
            if not np.isfinite(track.q[end]):
                continue
            try:
                found = self.slow.follow(track.s[end], fraction(track.q[end]), fraction(q))
                return complex(found.real.mid(), found.imag.mid())
            except Lost:
                continue
        found = [complex(b.real.mid(), b.imag.mid()) for b, _ in roots(at_knob(self.moving, fraction(q)), BITS)]
        return min(found, key=lambda s: float(self.picture.pixels_to_chord(np.array(s), track.s[i], track.s[i + 1])))

    def check_all_different(self, tracks):
        """Between two multiple points no two branches have the same root, and every root in view has a branch."""
        for q in self.sample_knobs(tracks):
            true = [(complex(b.real.mid(), b.imag.mid()), m) for b, m in roots(at_knob(self.moving, fraction(q)), BITS)]
            left = [s for s, m in true for _ in range(m)]
            for track in tracks:
                i = int(np.searchsorted(track.q * self.sign, q * self.sign)) - 1
                if i < 0 or i + 1 >= len(track.q) or not (track.finite[i] and track.finite[i + 1]):
                    continue
                s = self.root_at(track, i, q)
                near = min(left, key=lambda z: abs(z - s), default=None)
                good = near is not None and abs(near - s) <= tolerances.OWN_ROOT * self.scale(s)
                self.report.check(good, f"{self.name} {track.number}: a root of its own at {q!r}", s, [near])
                if good:
                    left.remove(near)
            missing = [s for s in left if self.picture.shows(s, INNER_VIEW)]
            self.report.check(not missing, f"{self.name}: every root in view has a branch at {q!r}", [], missing)

    def root_at(self, track, i, q):
        """The branch's root at a knob inside segment i, which may run into a zero."""
        if np.isfinite(track.q[i + 1]):
            return complex(self.roots_between(track, np.array([i]), np.array([q]))[0])
        return self.exact_root_between(track, i, q)

    def sample_knobs(self, tracks):
        """One vertex's knob inside each interval between multiple points, and some beyond the last vertices."""
        knobs = np.unique(np.concatenate([abs(t.q[np.isfinite(t.q) & (t.q != 0)]) for t in tracks] or [np.array([])]))
        if not len(knobs):
            return []
        limits = sorted({0.0, np.inf} | {abs(float(m.knob.mid())) for m in self.meetings if m.knob is not None})
        found = []
        for low, high in zip(limits, limits[1:]):
            inside = knobs[(knobs > low * (1 + 1e-9)) & (knobs < high * (1 - 1e-9))]
            if len(inside):
                # Off the vertices, so that no knob is the end of a segment.
                found.append(float(inside[len(inside) // 2]) * (1 + 1e-11))
        found += [float(knobs[-1]) * factor for factor in (10.0, 1e4)]
        return [self.sign * q for q in found if np.isfinite(q)]


def fraction_near(ball, low, high):
    """The midpoint of a ball as a rational, moved into an interval."""
    mantissa, power = ball.mid().man_exp()
    return max(low, min(high, fmpq(mantissa) * fmpq(2) ** int(power)))


def runs(indices):
    """Consecutive indices of segments as pairs of vertices: (first, behind the last)."""
    found = []
    for i in indices:
        if found and found[-1][1] == i:
            found[-1] = (found[-1][0], i + 1)
        else:
            found.append((i, i + 1))
    return found


class Track:
    """One branch as arrays."""

    def __init__(self, points):
        nan = float("nan")
        self.number = -1
        self.s = np.array([complex(nan if p[0] is None else p[0], nan if p[1] is None else p[1]) for p in points])
        self.finite = np.isfinite(self.s)
        self.q = np.array([np.inf if p[2] is None else p[2] for p in points])
        self.into_zero = bool(len(points)) and points[-1][2] is None
        if self.into_zero and len(points) > 1 and points[-2][2] is not None and points[-2][2] < 0:
            self.q[-1] = -np.inf
        self.pieces = None

    def cut(self, limit):
        """Leaves out the end that is farther out than a limit."""
        inside = np.flatnonzero(~self.finite | (abs(self.s) <= limit))
        keep = min(len(self.s), (int(inside[-1]) if len(inside) else 0) + 2)
        self.s, self.q, self.finite = self.s[:keep], self.q[:keep], self.finite[:keep]

    def stands_at(self, place, size):
        """True if no vertex is away from a place."""
        room = 1e-9 * max(abs(place), size)
        return bool((abs(self.s[self.finite] - place) <= room).all())
