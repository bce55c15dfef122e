"""A thousand positions of a five-axle train over a ring of a hundred joints, on one thread, against the same linear programs
through scipy's HiGHS, in one run.

usage: traffic.py        (from the root of the repository; needs numpy and scipy)

Both sides do, for each position: least and greatest push, both ends of the interval of the load factor, and the closest
line. thrustmark's time holds besides them the governing line's peaks and stresses and the envelope of all joints. The
optima are compared too. Prints medians and their ratio.
"""

import json
import os
import statistics
import subprocess
import sys
import tempfile
import time

import numpy as np
from scipy.optimize import linprog


def rows(joints, dead, live):
    """Moment and thrust in every joint as affine functions of (H, V, M0, factor); both sides of a load at a joint."""
    out = []
    x0, y0 = joints[0][1], joints[0][2]
    ends = {joints[0][0], joints[-1][0]}
    for s, x, y, tx, ty, d in joints:
        for after in (False, True):
            near = 1e-9 * joints[-1][0]
            before = lambda f: f[0] <= s + near if after else f[0] < s - near
            fixed = [(fx, fy) for f, fx, fy in ((f, f[1], f[2]) for f in dead) if before(f)]
            moving = [(f[1], f[2]) for f in live if before(f)]
            m = lambda forces: sum((x - px) * fy for px, fy in forces)
            n = lambda forces: sum(fy for _, fy in forces) * ty
            moment = ([-(y - y0), x - x0, 1.0, m(moving)], m(fixed))
            thrust = ([tx, ty, 0.0, n(moving)], n(fixed))
            out.append((np.array(moment[0]), moment[1], np.array(thrust[0]), thrust[1], d))
    return out


def program(ring, part):
    """|M| <= part d N as A r <= b."""
    a, b = [], []
    for m, m0, n, n0, d in ring:
        for side in (1.0, -1.0):
            a.append(side * m - part * d * n)
            b.append(part * d * n0 - side * m0)
    return np.array(a), np.array(b)


def highs(cost, a, b, bounds):
    return linprog(cost, A_ub=a, b_ub=b, bounds=bounds, method="highs-ds")


def position(ring):
    """All programs of one position with the solver's time alone: values and seconds."""
    seconds = 0.0
    values = {}

    def timed(*arguments):
        nonlocal seconds
        start = time.perf_counter()
        found = highs(*arguments)
        seconds += time.perf_counter() - start
        return found

    a, b = program(ring, 0.5)
    free = (None, None)
    one = [free, free, free, (1.0, 1.0)]
    some = [free, free, free, (0.0, None)]
    for name, cost, bounds in (
        ("least", [1, 0, 0, 0], one),
        ("greatest", [-1, 0, 0, 0], one),
        ("factor", [0, 0, 0, -1], some),
        ("factor_least", [0, 0, 0, 1], some),
    ):
        found = timed(cost, a, b, bounds)
        values[name] = abs(found.fun) if found.status == 0 else None
    # The closest line by the same series of programs, each with the weights of the line before.
    tau, r = 0.5, timed([0, 0, 0, 0], a, b, one).x
    for _ in range(20):
        c, e = program(ring, tau)
        weights = np.repeat([d * (n @ r + n0) for _, _, n, n0, d in ring], 2)
        found = timed([0, 0, 0, 0, 1], np.hstack([c, -weights[:, None]]), e, one + [free])
        r = found.x[:4]
        reached = max(abs(m @ r + m0) / (d * (n @ r + n0)) for m, m0, n, n0, d in ring)
        if tau - reached <= 1e-12:
            break
        tau = reached
    values["closest"] = min(tau, reached)
    return values, seconds


def main():
    with tempfile.TemporaryDirectory() as folder:
        out = os.path.join(folder, "programs.json")
        command = ["cargo", "test", "--release", "--quiet", "--test", "traffic", "--", "--ignored", "programs_for_another_solver"]
        subprocess.run(command, check=True, env=dict(os.environ, THRUSTMARK_BENCH=out), stdout=subprocess.DEVNULL)
        with open(out) as file:
            told = json.load(file)
    ours = statistics.median(told["seconds"])
    each = ours / told["positions"]
    print(f"thrustmark: {told['positions']} positions in {ours * 1e3:.1f} ms, median of {len(told['seconds'])} runs on one thread: {each * 1e6:.1f} us each")
    times, worst = [], 0.0
    for solved in told["solved"]:
        values, seconds = position(rows(told["joints"], told["dead"], solved["live"]))
        times.append(seconds)
        for name, value in values.items():
            other = solved[name]
            if value is None or other is None:
                continue
            worst = max(worst, abs(value - other) / max(1.0, abs(other)))
    theirs = statistics.median(times)
    print(f"HiGHS through scipy: median {theirs * 1e6:.0f} us a position, {len(times)} positions, solver calls alone")
    print(f"ratio {theirs / each:.0f}; largest relative difference of an optimum {worst:.1e}")
    good = ours < 1.0 and theirs / each >= 50.0 and worst < 1e-6
    print("holds" if good else "DOES NOT HOLD")
    return 0 if good else 1


if __name__ == "__main__":
    sys.exit(main())
