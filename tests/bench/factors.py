"""Ten thousand load factors of a ring of a hundred joints, against HiGHS called through scipy, in one run.

The same linear programs, built here anew: pieces as wedges with their own centroids, joints between them, one moving load. Only the
solver's call is timed on this side; on the other side the place of the load and the rows are timed too. Prints the ratio of the
medians and the largest difference of the factors.

    python tests/bench/factors.py [--least 100]
"""

import json
import subprocess
import sys
import time

import numpy as np
from scipy.optimize import linprog

AGREE = 1e-7
FREE = [(None, None)] * 3 + [(0, None)]
# By itself the solver takes rows as kept within 1e-7, which the factor feels several times over.
TIGHT = {"primal_feasibility_tolerance": 1e-10, "dual_feasibility_tolerance": 1e-10}


def main():
    least = float(sys.argv[sys.argv.index("--least") + 1]) if "--least" in sys.argv else 100.0
    command = ["cargo", "bench", "--quiet", "--bench", "factors"]
    ours = json.loads(subprocess.run(command, check=True, capture_output=True, text=True).stdout)
    radius, half, depth, n = ours["radius"], ours["half_opening"], ours["depth"], ours["pieces"]
    angle = np.linspace(-half, half, n + 1)
    x, y = radius * np.sin(angle), radius * np.cos(angle)
    t = np.stack([np.cos(angle), -np.sin(angle)], axis=1)
    a = half / n
    r1, r2 = radius - depth / 2, radius + depth / 2
    middle = (angle[1:] + angle[:-1]) / 2
    centroid = 2 / 3 * np.sin(a) / a * (r2**3 - r1**3) / (r2**2 - r1**2) * np.sin(middle)
    piece = ours["weight"] * 2 * a * radius * depth
    down = np.concatenate([[0], np.cumsum(np.full(n, piece))])
    turn = np.concatenate([[0], np.cumsum(piece * centroid)])
    size = down[-1]
    zero, one = np.zeros(n + 1), np.ones(n + 1)
    # N and M as rows (H, V, M0, factor, constant); M0 about the left springing.
    n_rows = np.stack([t[:, 0], t[:, 1], zero, zero, -down * t[:, 1]], axis=1)
    m_rows = np.stack([-(y - y[0]), x - x[0], one, zero, -(down * x - turn)], axis=1)
    scale = np.array([size, size, size * radius, size])
    times, worst = [], 0.0
    for place, value in zip(ours["places"], ours["values"]):
        before = (x > place).astype(float)
        n_now, m_now = n_rows.copy(), m_rows.copy()
        n_now[:, 3] = -before * t[:, 1]
        m_now[:, 3] = -before * (x - place)
        rows = np.vstack([m_now - depth / 2 * n_now, -m_now - depth / 2 * n_now]) / size / radius
        a_ub, b_ub = rows[:, :4] * scale, -rows[:, 4]
        start = time.perf_counter_ns()
        res = linprog([0, 0, 0, -1], A_ub=a_ub, b_ub=b_ub, bounds=FREE, method="highs", options=TIGHT)
        times.append(time.perf_counter_ns() - start)
        assert res.status == 0, (place, res.message)
        worst = max(worst, abs(-res.fun * size / value - 1))
    own, theirs = np.median(ours["nanoseconds"]), np.median(times)
    ratio = theirs / own
    print(
        f"{len(times)} load factors of a ring of {n + 1} joints: median {own / 1000:.2f} µs here, {theirs / 1000:.0f} µs by HiGHS "
        f"through scipy: {ratio:.0f} times (wanted {least:.0f}); largest relative difference {worst:.1e}"
    )
    return 0 if ratio >= least and worst <= AGREE else 1


if __name__ == "__main__":
    sys.exit(main())
