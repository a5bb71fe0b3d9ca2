"""Times of smooth paths by an independent time-optimal planner, for tests/feed.

Versions used: Python 3.11.7, toppra 0.6.10, numpy 2.4.6, scipy 1.17.1.
Run:  python tests/oracles/planner_times.py > tests/oracles/planner_times.json

A path is a chain of tangent arcs and lines, each a length in mm and a curvature in 1/mm, from the origin with a given
heading. The planner gets X, Y and, as a third joint that bounds the feed, the length along the path.
"""

import importlib.metadata
import json
import sys

import numpy as np
import toppra
import toppra.algorithm
import toppra.constraint

toppra.setup_logging("ERROR")


class Chain(toppra.interpolator.AbstractGeometricPath):
    def __init__(self, pieces, heading):
        self.pieces = pieces
        self.lengths = np.array([length for length, _ in pieces])
        self.starts = np.concatenate([[0.0], np.cumsum(self.lengths)])
        self.places, self.headings = [np.zeros(2)], [heading]
        for length, k in pieces:
            self.places.append(self.places[-1] + self.step(self.headings[-1], k, length))
            self.headings.append(self.headings[-1] + k * length)

    @staticmethod
    def step(heading, k, s):
        if k == 0.0:
            return s * np.array([np.cos(heading), np.sin(heading)])
        end = heading + k * s
        return np.array([np.sin(end) - np.sin(heading), np.cos(heading) - np.cos(end)]) / k

    def one(self, s, order):
        i = int(np.clip(np.searchsorted(self.starts, s, side="right") - 1, 0, len(self.pieces) - 1))
        _, k = self.pieces[i]
        ahead = s - self.starts[i]
        heading = self.headings[i] + k * ahead
        if order == 0:
            return [*(self.places[i] + self.step(self.headings[i], k, ahead)), s]
        if order == 1:
            return [np.cos(heading), np.sin(heading), 1.0]
        return [-k * np.sin(heading), k * np.cos(heading), 0.0]

    def __call__(self, s, order=0):
        if np.ndim(s) == 0:
            return np.array(self.one(float(s), order))
        return np.array([self.one(float(x), order) for x in s])

    @property
    def dof(self):
        return 3

    @property
    def path_interval(self):
        return np.array([0.0, self.starts[-1]])


def fitted(curve, t0, t1, arcs):
    """Arcs of a smooth curve's own mean curvatures over equal parts of its length: a fine approximation by tangent arcs."""
    t = np.linspace(t0, t1, 200001)
    z = curve(t)
    dz = np.gradient(z, t)
    s = np.concatenate([[0.0], np.cumsum(np.abs(np.diff(z)))])
    heading = np.unwrap(np.angle(dz))
    joints = np.linspace(0.0, s[-1], arcs + 1)
    at = np.interp(joints, s, heading)
    return [(float(l), float(dh / l)) for l, dh in zip(np.diff(joints), np.diff(at))], float(at[0])


def paths():
    even = [(200.0, 200.0), (500.0, 500.0), (500.0, 300.0)]
    yield "line", ([(100.0, 0.0)], 0.0), even[1:], 3000.0
    yield "slanting line", ([(100.0, 0.0)], 0.5), even, 3000.0
    yield "ellipse", fitted(lambda t: 50 * np.cos(t) + 30j * np.sin(t), 0, 2 * np.pi, 48), even, 3000.0
    yield "sine", fitted(lambda t: t + 10j * np.sin(2 * np.pi * t / 100), 0, 200, 48), even, 6000.0
    yield "spiral", fitted(lambda t: 5 * np.exp((0.2 + 1j) * t), 0, 2 * np.pi, 32), even, 3000.0
    yield "leaf", fitted(lambda t: (20 + 6 * np.cos(5 * t)) * np.exp(1j * t), 0, 2 * np.pi, 160), even, 6000.0
    yield "quarter circle", ([(2.5 * np.pi, 0.2)], 0.0), even[:2], 3000.0
    yield "leaf of few arcs", fitted(lambda t: (20 + 6 * np.cos(5 * t)) * np.exp(1j * t), 0, 2 * np.pi, 60), even, 6000.0


def time(chain, acceleration, feed):
    cap = feed / 60.0
    speeds = np.array([[-1e3, 1e3], [-1e3, 1e3], [-cap, cap]])
    pulls = np.array([[-acceleration[0], acceleration[0]], [-acceleration[1], acceleration[1]], [-1e9, 1e9]])
    limits = [
        toppra.constraint.JointVelocityConstraint(speeds),
        toppra.constraint.JointAccelerationConstraint(
            pulls, discretization_scheme=toppra.constraint.DiscretizationType.Interpolation
        ),
    ]
    inner = [np.linspace(a, b, max(4, int(8000 * (b - a) / chain.starts[-1])), endpoint=False)
             for a, b in zip(chain.starts, chain.starts[1:])]
    grid = np.concatenate([*inner, [chain.starts[-1]]])
    planner = toppra.algorithm.TOPPRA(limits, chain, gridpoints=grid, solver_wrapper="seidel")
    _, speed, *_ = planner.compute_parameterization(0, 0)
    return float(np.sum(2 * np.diff(grid) / (speed[1:] + speed[:-1])))


def main():
    rows = []
    for name, (pieces, heading), accelerations, feed in paths():
        chain = Chain(pieces, heading)
        times = [time(chain, acceleration, feed) for acceleration in accelerations]
        print(name, times, file=sys.stderr)
        rows.append({"name": name, "heading": heading, "feed_mm_min": feed, "pieces": pieces,
                     "runs": [{"acceleration_mm_s2": a, "time_s": t} for a, t in zip(accelerations, times)]})
    planner = f"toppra {importlib.metadata.version('toppra')}, numpy {np.__version__}"
    print(json.dumps({"planner": planner, "paths": rows}))


main()
