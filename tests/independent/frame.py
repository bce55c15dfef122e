"""Compares elastic lines with a general-purpose frame analysis: target/independent/elastic.json, written by cargo test.

Every rib stands there as straight bars between nodes, which for an axis drawn in chords is the rib itself; a curved axis comes
in two finenesses, from which the limit is taken (its error falls with the square of the length of the bars). Push, reaction
and moment at the springings and the moment at every node are compared with PyNiteFEA's linear analysis of a plane frame.

    python tests/independent/frame.py [elastic.json]
"""

import json
import sys
from pathlib import Path

import numpy as np
from Pynite import FEModel3D

OWED = 1e-6


def solve(case, nodes):
    """H, V, M_0 at the left springing and the moments at the nodes, in the signs of the cases."""
    model = FEModel3D()
    depth, stiffness = case["depth"], case["stiffness"]
    model.add_material("rib", stiffness, stiffness / 2.4, 0.2, 0.0)
    # The stiffness holds the width already.
    inertia = depth**3 / 12
    model.add_section("rectangle", depth, inertia, inertia, inertia)
    last = len(nodes) - 1
    for i, (x, y) in enumerate(nodes):
        model.add_node(f"N{i}", x, y, 0.0)
        ends = i in (0, last)
        built_in = ends and case["support"] == "hingeless"
        model.def_support(f"N{i}", ends, ends, True, True, True, built_in)
    for i in range(last):
        model.add_member(f"B{i}", f"N{i}", f"N{i + 1}", "rib", "rectangle")
    if case["support"] == "three-hinged":
        top = min(range(len(nodes)), key=lambda i: np.hypot(nodes[i][0] - case["crown"][0], nodes[i][1] - case["crown"][1]))
        model.def_releases(f"B{top}", Rzi=True)
    for x, y, fx, fy in case["loads"]:
        i = min(range(len(nodes)), key=lambda i: abs(nodes[i][0] - x))
        assert abs(nodes[i][0] - x) < 1e-9, (case["name"], x)
        model.add_node_load(f"N{i}", "FX", fx)
        model.add_node_load(f"N{i}", "FY", fy)
        # A load that acts off the axis turns the joint too.
        model.add_node_load(f"N{i}", "MZ", -(y - nodes[i][1]) * fx)
    strain = case["strain"]
    dx, dy = (nodes[last][k] - nodes[0][k] for k in (0, 1))
    # A free strain lengthens all distances alike: the same as abutments that move together by as much.
    moves = {"N0": case["left"], f"N{last}": [case["right"][0] - strain * dx, case["right"][1] - strain * dy, case["right"][2]]}
    for node, (u, v, turn) in moves.items():
        for direction, value in (("DX", u), ("DY", v), ("RZ", turn)):
            if value:
                model.def_node_disp(node, direction, value)
    model.analyze_linear()
    combo = "Combo 1"
    left = model.nodes["N0"]
    h, v, m0 = left.RxnFX[combo], left.RxnFY[combo], -left.RxnMZ[combo]
    moments = []
    for i, (x, y) in enumerate(nodes):
        m = m0 + v * (x - nodes[0][0]) - h * (y - nodes[0][1])
        for lx, ly, fx, fy in case["loads"]:
            if lx < x - 1e-9:
                m += (x - lx) * fy - (y - ly) * fx
        moments.append(m)
    return np.array([h, v, m0]), np.array(moments)


def main():
    path = Path(sys.argv[1] if len(sys.argv) > 1 else "target/independent/elastic.json")
    cases = json.loads(path.read_text())
    worst = 0.0
    for case in cases:
        found = [solve(case, nodes) for nodes in case["nodes"]]
        ends, moments = found[-1]
        if len(found) == 2:
            # The coarser nodes are every second of the finer.
            ends = ends + (ends - found[0][0]) / 3
            moments = moments[::2] + (moments[::2] - found[0][1]) / 3
        size = max(abs(ends[0]), abs(ends[1]))
        arm = max(np.abs(case["moments"]).max(), size * case["depth"] / 6)
        off = max(
            np.abs(ends[:2] - case["reaction"][:2]).max() / size,
            abs(ends[2] - case["reaction"][2]) / arm,
            np.abs(moments - case["moments"]).max() / arm,
        )
        worst = max(worst, off)
        if not off <= OWED:
            print(f"{case['name']}: {case['reaction']}, here {ends.tolist()}, off by {off:.1e}")
    print(f"elastic line, {len(cases)} ribs against a frame analysis: largest relative difference {worst:.1e} (owed {OWED:.0e})")
    return 0 if worst <= OWED else 1


if __name__ == "__main__":
    sys.exit(main())
