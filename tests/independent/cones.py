"""Rings of finite strength as second-order cones by Clarabel, and by tangents with HiGHS: a second opinion on the load factors.

The rings and the factors stand in target/independent/cones.json, written by cargo test. The law of a block of uniform stress,
|M| <= N d/2 - N^2 / (2 f b), is a rotated cone in (M, N); here every joint of a ring of voussoirs has two of them.

    python tests/independent/cones.py [cones.json]
"""

import json
import sys
from pathlib import Path

import clarabel
import numpy as np
from scipy import sparse
from scipy.optimize import linprog

OWED = 1e-7


def rows(case):
    """N and M as rows (H, V, M0, factor, constant) of the joints, before and after a load that stands on one."""
    out_n, out_m = [], []
    x0, y0 = case["joints"][0][:2]
    for x, y, tx, ty, s in case["joints"]:
        feet = {f[0] for f in case["forces"]}
        for side in ((False, True) if any(abs(f - s) < 1e-9 for f in feet) else (True,)):
            n, m = [tx, ty, 0.0, 0.0, 0.0], [-(y - y0), x - x0, 1.0, 0.0, 0.0]
            for foot, fx, fy, w, p, varies in case["forces"]:
                if foot < s - 1e-9 or (side and foot < s + 1e-9):
                    i = 3 if varies else 4
                    n[i] += w * tx + p * ty
                    m[i] += (x - fx) * p - (y - fy) * w
            out_n.append(n)
            out_m.append(m)
    return np.array(out_n), np.array(out_m)


def scaled(case):
    n, m = rows(case)
    force = np.abs(n[:, 4]).max()
    arm = max(abs(case["joints"][-1][0] - case["joints"][0][0]), 1.0)
    scale = np.array([force, force, force * arm, 1.0])
    return np.column_stack([n[:, :4] * scale, n[:, 4]]) / force, np.column_stack([m[:, :4] * scale, m[:, 4]]) / force / arm, force, arm


def by_cones(case):
    n, m, force, arm = scaled(case)
    d, c = case["depth"] / 2 / arm, force / (2 * case["strength"]) / arm
    # c N^2 <= d N -+ M: | (2 sqrt(c) N, u - 1) | <= u + 1 with u = d N -+ M.
    blocks, b, cones = [], [], []
    for sign in (1, -1):
        for i in range(len(n)):
            u, const = d * n[i, :4] - sign * m[i, :4], d * n[i, 4] - sign * m[i, 4]
            root = 2 * np.sqrt(c)
            blocks += [-u, -u, -root * n[i, :4]]
            b += [const + 1, const - 1, root * n[i, 4]]
            cones.append(clarabel.SecondOrderConeT(3))
    blocks.append(np.array([0, 0, 0, -1.0]))
    b.append(0.0)
    cones.append(clarabel.NonnegativeConeT(1))
    settings = clarabel.DefaultSettings()
    settings.verbose = False
    settings.tol_gap_abs = settings.tol_gap_rel = settings.tol_feas = 1e-11
    solver = clarabel.DefaultSolver(
        sparse.csc_matrix((4, 4)), np.array([0, 0, 0, -1.0]), sparse.csc_matrix(np.array(blocks)), np.array(b), cones, settings
    )
    solution = solver.solve()
    assert "Solved" in str(solution.status), solution.status
    return -solution.obj_val


def by_tangents(case):
    n, m, force, arm = scaled(case)
    d, c = case["depth"] / 2 / arm, force / (2 * case["strength"]) / arm
    touched = [(i, 0.0) for i in range(len(n))]
    for _ in range(200):
        a, b = [], []
        for i, at in touched:
            for sign in (1, -1):
                row = sign * m[i] - (d - 2 * c * at) * n[i]
                a.append(row[:4])
                b.append(c * at * at - row[4])
        res = linprog([0, 0, 0, -1], A_ub=1e4 * np.array(a), b_ub=1e4 * np.array(b), bounds=[(None, None)] * 3 + [(0, None)],
                      method="highs-ds", options={"primal_feasibility_tolerance": 1e-10, "dual_feasibility_tolerance": 1e-10})
        assert res.status == 0, res.message
        x = np.append(res.x, 1.0)
        thrust, moment = n @ x, m @ x
        over = np.abs(moment) - d * thrust + c * thrust**2
        worst = np.flatnonzero(over > 1e-12)
        if not len(worst):
            break
        touched += [(i, thrust[i]) for i in worst]
    return -res.fun


def main():
    path = Path(sys.argv[1] if len(sys.argv) > 1 else "target/independent/cones.json")
    cases = json.loads(path.read_text())
    worst = {"Clarabel": 0.0, "HiGHS": 0.0}
    for case in cases:
        for name, solve in (("Clarabel", by_cones), ("HiGHS", by_tangents)):
            here = solve(case)
            off = abs(here / case["factor"] - 1)
            worst[name] = max(worst[name], off)
            if off > OWED:
                print(f"{case['name']}: {case['factor']!r}, here {here!r} by {name}, off by {off:.1e}")
    told = ", ".join(f"{off:.1e} by {name}" for name, off in worst.items())
    print(f"finite strength, {len(cases)} rings: largest relative difference {told} (owed {OWED:.0e})")
    return 0 if max(worst.values()) <= OWED else 1


if __name__ == "__main__":
    sys.exit(main())
