"""Works the coefficients of buckling out anew and compares them with the table in src/statics/slender.rs.

A parabolic rib of uniform stiffness under a load uniform in plan carries it by thrust alone. Straight bars with their
geometric stiffness [J.S. Przemieniecki, Theory of Matrix Structural Analysis, 1968, chapter 15], as many as make the
eigenvalue settle; the rib hardly shortens. The published table lies below these values, by up to nine in a hundred for steep
ribs, which is the safe side; it must never lie above them by more than one and a half in a hundred, and never further below.

    python tests/independent/buckling.py [slender.rs]
"""

import re
import sys
from pathlib import Path

import numpy as np
from scipy.linalg import eigh

ABOVE, BELOW = 0.015, 0.09


def stiffness(length, ei, ea, push):
    """Elastic and geometric stiffness of a bar in its own axes, for a compression `push`."""
    a, b = ea / length, ei / length**3
    k = np.zeros((6, 6))
    k[0, 0] = k[3, 3] = a
    k[0, 3] = k[3, 0] = -a
    bend = b * np.array(
        [[12, 6 * length, -12, 6 * length],
         [6 * length, 4 * length**2, -6 * length, 2 * length**2],
         [-12, -6 * length, 12, -6 * length],
         [6 * length, 2 * length**2, -6 * length, 4 * length**2]]
    )
    k[np.ix_([1, 2, 4, 5], [1, 2, 4, 5])] = bend
    g = np.zeros((6, 6))
    g[np.ix_([1, 2, 4, 5], [1, 2, 4, 5])] = push / (30 * length) * np.array(
        [[36, 3 * length, -36, 3 * length],
         [3 * length, 4 * length**2, -3 * length, -(length**2)],
         [-36, -3 * length, 36, -3 * length],
         [3 * length, -(length**2), -3 * length, 4 * length**2]]
    )
    return k, g


def critical(support, rise, bars=96):
    """Push at which a parabola of span 1 and stiffness 1 buckles."""
    x = np.linspace(0, 1, bars + 1)
    y = 4 * rise * x * (1 - x)
    crown = bars // 2
    size = 3 * (bars + 1) + 1
    elastic, geometric = np.zeros((size, size)), np.zeros((size, size))
    for i in range(bars):
        dx, dy = x[i + 1] - x[i], y[i + 1] - y[i]
        length = np.hypot(dx, dy)
        c, s = dx / length, dy / length
        # The thrust of a push 1.
        k, g = stiffness(length, 1.0, 1e7, 1.0 / c)
        turn = np.kron(np.eye(2), np.array([[c, s, 0], [-s, c, 0], [0, 0, 1]]))
        place = list(range(3 * i, 3 * i + 6))
        if support == "THREE_HINGED" and i == crown:
            # The bar right of the crown turns by itself.
            place[2] = size - 1
        elastic[np.ix_(place, place)] += turn.T @ k @ turn
        geometric[np.ix_(place, place)] += turn.T @ g @ turn
    held = [0, 1, 3 * bars, 3 * bars + 1]
    if support == "HINGELESS":
        held += [2, 3 * bars + 2]
    if support != "THREE_HINGED":
        held.append(size - 1)
    free = np.setdiff1d(np.arange(size), held)
    # Of the reciprocal problem the greatest value is the least push.
    values = eigh(geometric[np.ix_(free, free)], elastic[np.ix_(free, free)], eigvals_only=True)
    return 1 / values[-1]


def tables(path):
    text = Path(path).read_text()
    for name in ("HINGELESS", "TWO_HINGED", "THREE_HINGED"):
        body = re.search(rf"const {name}: .*?=\s*\[(.*?)\];", text, re.S).group(1)
        rows = re.findall(r"\(([\d.]+), ([\d.]+)\)", body)
        yield name, [(float(a), float(b)) for a, b in rows]


def main():
    path = sys.argv[1] if len(sys.argv) > 1 else "src/statics/slender.rs"
    low, high, count, broken = 0.0, 0.0, 0, False
    for name, rows in tables(path):
        for rise, gamma in rows:
            here = 8 * rise * critical(name, rise)
            off = gamma / here - 1
            low, high, count = min(low, off), max(high, off), count + 1
            if not -BELOW <= off <= ABOVE:
                broken = True
                print(f"{name} f/l {rise}: {gamma}, here {here:.2f}, off by {off:.1%}")
    print(
        f"buckling coefficients, {count} of the table: {-low:.1%} below to {high:.1%} above an eigenvalue analysis "
        f"(allowed {BELOW:.1%} and {ABOVE:.1%})"
    )
    return 1 if broken else 0


if __name__ == "__main__":
    sys.exit(main())
