"""Solves the spans of target/independent/cases.json anew and compares.

Own mechanics in numpy, optima by HiGHS through scipy. The closest line is found by halving the interval of the largest
|e| / d: for a given value the lines form a linear program, on a set of joints to which the worst ones of a fine grid are
added until nothing changes.

    python tests/independent/compare.py [cases.json]
"""

import json
import sys
from pathlib import Path

import numpy as np
from scipy.optimize import linprog

OWED = 1e-9
# The solver takes a row as kept within 1e-10; rows are blown up so that this is rounding.
SHARPEN = 1e4


class Span:
    def __init__(self, case):
        self.pieces, s = [], 0.0
        for piece in case["axis"]:
            if "line" in piece:
                a, b = map(np.array, piece["line"])
                length = np.hypot(*(b - a))
            else:
                length = piece["arc"][1] * abs(piece["arc"][3])
            self.pieces.append((s, s + length, piece))
            s += length
        self.length = s
        self.forces, self.weight = case["forces"], case["weight"]
        self.depth = case["depth"] or 1.0
        self.origin = self.at(np.array([0.0]), 0)[0][0]

    def at(self, s, index):
        """Point and tangent at lengths s of one piece."""
        start, end, piece = self.pieces[index]
        u = (s - start)[:, None]
        if "line" in piece:
            a, b = map(np.array, piece["line"])
            t = (b - a) / np.hypot(*(b - a))
            return a + u * t, np.broadcast_to(t, (len(s), 2))
        centre, radius, angle, sweep = piece["arc"]
        phi = angle + np.sign(sweep) * u / radius
        out = np.hstack([np.cos(phi), np.sin(phi)])
        side = np.hstack([-np.sin(phi), np.cos(phi)]) * np.sign(sweep)
        return np.array(centre) + radius * out, side

    def weight_before(self, s, index):
        """Weight and its moment about the origin up to lengths s of one piece: 20-point Gauss on every piece."""
        x, w = np.polynomial.legendre.leggauss(20)
        total = np.zeros(len(s))
        moment = np.zeros(len(s))
        for k in range(index + 1):
            start, end, _ = self.pieces[k]
            until = s if k == index else np.full(len(s), end)
            half = (until - start) / 2
            places = start + half[:, None] * (1 + x[None, :])
            points = self.at(places.ravel(), k)[0][:, 0].reshape(places.shape) - self.origin[0]
            total += self.weight * 2 * half
            moment += self.weight * half * (points * w).sum(axis=1)
        return total, moment

    def rows(self, s, index, loads):
        """N and M as rows (H, V, M0, constant) at lengths s of a piece, after the first `loads` loads."""
        p, t = self.at(s, index)
        q = p - self.origin
        fx = sum((f["force"][0] for f in self.forces[:loads]), 0.0) + np.zeros(len(s))
        fy = sum((f["force"][1] for f in self.forces[:loads]), 0.0) + np.zeros(len(s))
        m = np.zeros(len(s))
        for f in self.forces[:loads]:
            m += (p[:, 0] - f["at"][0]) * f["force"][1] - (p[:, 1] - f["at"][1]) * f["force"][0]
        if self.weight:
            total, moment = self.weight_before(s, index)
            fy = fy - total
            m -= total * q[:, 0] - moment
        zero, one = np.zeros(len(s)), np.ones(len(s))
        n_rows = np.stack([t[:, 0], t[:, 1], zero, fx * t[:, 0] + fy * t[:, 1]], axis=1)
        m_rows = np.stack([-q[:, 1], q[:, 0], one, m], axis=1)
        return n_rows, m_rows

    def stretches(self):
        """Stretches without a load or a joint of pieces inside: from, to, piece, loads before."""
        feet = [f["foot"] for f in self.forces]
        for index, (start, end, _) in enumerate(self.pieces):
            cuts = [start] + [f for f in feet if start < f < end] + [end]
            for a, b in zip(cuts, cuts[1:]):
                if b > a:
                    yield a, b, index, sum(f <= a + 1e-9 for f in feet)


def closest(case):
    span = Span(case)
    grid = []
    for a, b, index, loads in span.stretches():
        s = np.linspace(a, b, 400)
        grid.append((s, index, loads, *span.rows(s, index, loads)))
    n_all = np.vstack([g[3] for g in grid])
    m_all = np.vstack([g[4] for g in grid])
    force = np.abs(n_all[:, 3]).max() + sum(np.hypot(*f["force"]) for f in span.forces) + span.weight * span.length
    scale = np.array([force, force, force * span.length])
    chosen = set(range(0, len(n_all), max(1, len(n_all) // 60)))
    extra_n, extra_m = [], []

    def line(tau):
        """A line with ratio at most tau on the joints so far, or None. N is at least a ten-thousandth of the loads."""
        n = np.vstack([n_all[sorted(chosen)]] + extra_n) / force
        m = np.vstack([m_all[sorted(chosen)]] + extra_m) / force / span.length
        room = tau * span.depth / span.length * n
        a = np.vstack([m - room, -m - room, -n])
        slack = np.concatenate([np.ones(2 * len(n)), np.zeros(len(n))])
        least = np.concatenate([np.zeros(2 * len(n)), np.full(len(n), 1e-4)])
        res = linprog(
            [0, 0, 0, 1],
            A_ub=SHARPEN * np.hstack([a[:, :3] * scale, -slack[:, None]]),
            b_ub=SHARPEN * (-a[:, 3] - least),
            bounds=[(-1e4, 1e4)] * 3 + [(-1e-3, 10)],
            method="highs-ds",
            options={"primal_feasibility_tolerance": 1e-10, "dual_feasibility_tolerance": 1e-10},
        )
        return res.x[:3] * scale if res.status == 0 and res.x[3] <= 0 else None

    def ratios(r, n, m):
        thrust = n[:, :3] @ r + n[:, 3]
        moment = m[:, :3] @ r + m[:, 3]
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.where(thrust > 0, np.abs(moment) / (span.depth * thrust), np.inf)

    low, high = 0.0, 1e3
    while True:
        # Halving between a value that no line reaches and one that some line reaches, on the joints so far.
        r = line(high)
        while high - low > 1e-13 + 1e-12 * high:
            half = (low + high) / 2
            found = line(half)
            if found is None:
                low = half
            else:
                r, high = found, half
                n = np.vstack([n_all[sorted(chosen)]] + extra_n)
                m = np.vstack([m_all[sorted(chosen)]] + extra_m)
                high = min(high, max(low, ratios(r, n, m).max()))
        value = ratios(r, n_all, m_all)
        worst, added, position = high, 0, 0
        for s, index, loads, _, _ in grid:
            v = value[position : position + len(s)]
            position += len(s)
            peak = (v >= np.append(v[1:], 0)) & (v >= np.append(0, v[:-1])) & (v > high * (1 - 1e-4))
            for k in np.flatnonzero(peak):
                a, b = s[max(k - 1, 0)], s[min(k + 1, len(s) - 1)]
                for _ in range(12):
                    fine = np.linspace(a, b, 21)
                    fn, fm = span.rows(fine, index, loads)
                    v_fine = ratios(r, fn, fm)
                    best = int(v_fine.argmax())
                    a, b = fine[max(best - 1, 0)], fine[min(best + 1, 20)]
                worst = max(worst, v_fine[best])
                if v_fine[best] > high * (1 + 1e-11):
                    extra_n.append(fn[best : best + 1])
                    extra_m.append(fm[best : best + 1])
                    added += 1
        if not added:
            return worst
        low, high = high * (1 - 1e-11), worst * (1 + 1e-9)


def limits(case):
    """Least and greatest push, least and greatest factor of one load: linear programs, exchange on a fine grid."""
    span = Span(case)
    varying = case["varying"]
    fixed = [dict(f) for f in span.forces]
    unit = fixed[varying]["force"]
    fixed[varying]["force"] = [0.0, 0.0]
    alone = [dict(f, force=[0.0, 0.0]) for f in fixed]
    alone[varying]["force"] = unit
    weight = span.weight

    def rows(s, index, loads):
        """N, M, S as rows (H, V, M0, factor, constant)."""
        span.forces, span.weight = fixed, weight
        n, m = span.rows(s, index, loads)
        span.forces, span.weight = alone, 0.0
        dn, dm = span.rows(s, index, loads)
        full_n = np.column_stack([n[:, :3], dn[:, 3], n[:, 3]])
        full_m = np.column_stack([m[:, :3], dm[:, 3], m[:, 3]])
        t = n[:, :2]
        # Shear: the resultant along the normal. Its parts come from N of the two unit tangents.
        span.forces, span.weight = fixed, weight
        shear = []
        for forces, w in ((fixed, weight), (alone, 0.0)):
            fx = sum((f["force"][0] for f in forces[:loads]), 0.0) + np.zeros(len(s))
            fy = sum((f["force"][1] for f in forces[:loads]), 0.0) + np.zeros(len(s))
            if w:
                fy = fy - span.weight_before(s, index)[0]
            shear.append(-fx * t[:, 1] + fy * t[:, 0])
        full_s = np.column_stack([-t[:, 1], t[:, 0], np.zeros(len(s)), shear[1], shear[0]])
        return full_n, full_m, full_s

    half, friction = span.depth / 2, case["friction"]
    force = sum(np.hypot(*f["force"]) for f in case["forces"]) + weight * span.length
    scale = np.array([force, force, force * span.length, 1.0])

    def constraints(s, index, loads):
        n, m, q = rows(s, index, loads)
        parts = [(m - half * n) / span.length, (-m - half * n) / span.length]
        if friction:
            parts += [q - friction * n, -q - friction * n]
        return np.stack(parts, axis=1) / force

    grid = [
        (s, index, loads, constraints(s, index, loads))
        for a, b, index, loads in span.stretches()
        for s in [np.linspace(a, b, 200)]
    ]
    start = np.vstack([g[3].reshape(-1, 5)[:: max(1, len(g[3]) // 12)] for g in grid])

    def extreme(cost, factor):
        chosen = [start]
        for _ in range(60):
            a = np.vstack(chosen)
            for method in ("highs-ds", "highs", "highs-ipm"):
                res = linprog(
                    cost,
                    A_ub=SHARPEN * a[:, :4] * scale,
                    b_ub=-SHARPEN * a[:, 4],
                    bounds=[(-1e4, 1e4)] * 3 + [factor],
                    method=method,
                    options={"primal_feasibility_tolerance": 1e-10, "dual_feasibility_tolerance": 1e-10},
                )
                if res.status in (0, 2):
                    break
            if res.status == 2:
                return None
            assert res.status == 0, res.message
            x = np.append(res.x * scale, 1.0)
            added = []
            for s, index, loads, c in grid:
                v = c @ x
                for k in range(v.shape[1]):
                    w = v[:, k]
                    peak = (w >= np.append(w[1:], -9)) & (w >= np.append(-9, w[:-1])) & (w > -1e-4)
                    for i in np.flatnonzero(peak):
                        a0, b0 = s[max(i - 1, 0)], s[min(i + 1, len(s) - 1)]
                        for _ in range(10):
                            fine = np.linspace(a0, b0, 21)
                            fc = constraints(fine, index, loads)[:, k]
                            best = int((fc @ x).argmax())
                            a0, b0 = fine[max(best - 1, 0)], fine[min(best + 1, 20)]
                        if fc[best] @ x > 1e-13 * max(1.0, np.abs(res.x).max()):
                            added.append(fc[best])
            if not added:
                # Held by the box alone: without end.
                return None if abs(res.fun) > 9e3 else res.fun
            chosen.append(np.array(added))
        return res.fun

    free, one = (0, 1e4), (1, 1)
    found = {
        "least_push": extreme([1, 0, 0, 0], one),
        "greatest_push": extreme([-1, 0, 0, 0], one),
        "least_factor": extreme([0, 0, 0, 1], free),
        "greatest_factor": extreme([0, 0, 0, -1], free),
    }
    for name, size in (("least_push", force), ("greatest_push", -force), ("greatest_factor", -1)):
        if found[name] is not None:
            found[name] *= size
    return found


def main():
    path = Path(sys.argv[1] if len(sys.argv) > 1 else "target/independent/cases.json")
    cases = json.loads(path.read_text())
    worst = 0.0
    for case in cases["closest"]:
        found = closest(case)
        off = abs(found - case["value"]) / max(abs(found), 1e-6)
        worst = max(worst, off)
        if off > OWED:
            print(f"{case['name']}: {case['value']!r}, here {found!r}, off by {off:.1e}")
    print(f"closest line, {len(cases['closest'])} spans: largest relative difference {worst:.1e} (owed {OWED:.0e})")
    worst_limit, count, none = 0.0, 0, 0
    for case in cases["limit"]:
        for name, here in limits(case).items():
            there = case[name]
            if here is None or there is None:
                none += 1
                if (here is None) != (there is None):
                    print(f"{case['name']} {name}: {there!r}, here {here!r}")
                    worst_limit = np.inf
                continue
            off = abs(here - there) / max(abs(here), 1.0)
            worst_limit, count = max(worst_limit, off), count + 1
            if off > OWED:
                print(f"{case['name']} {name}: {there!r}, here {here!r}, off by {off:.1e}")
    print(
        f"limits of {len(cases['limit'])} rings, {count} values and {none} without (no line, or without end) on both sides: "
        f"largest relative difference {worst_limit:.1e} (owed {OWED:.0e})"
    )
    return 0 if max(worst, worst_limit) <= OWED else 1


if __name__ == "__main__":
    sys.exit(main())
