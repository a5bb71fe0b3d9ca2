"""Points, lengths and boxes of DXF curves from independent libraries, for tests/read_dxf/curves.rs.

Run with Python 3.11, numpy 2.4.6, scipy 1.17.1 and ezdxf 1.4.5:

    python tests/oracles/dxf_curves.py > tests/oracles/dxf_curves.json

Splines are evaluated by scipy (BSpline, CubicSpline), ellipses and block references by ezdxf; lengths by scipy's
quadrature; boxes by dense sampling with a golden section around the extremes.
"""

import json
import math
import random
import tempfile

import ezdxf
import numpy as np
from scipy.integrate import quad
from scipy.interpolate import BSpline, CubicSpline
from scipy.optimize import minimize_scalar

POINTS = 48


def pairs(*groups):
    return "".join(f"{code}\n{value!r}\n".replace("'", "") for code, value in groups)


def drawing(entities, blocks=""):
    text = pairs((0, "SECTION"), (2, "HEADER"), (9, "$ACADVER"), (1, "AC1015"), (9, "$INSUNITS"), (70, 4))
    text += pairs((0, "ENDSEC"))
    if blocks:
        text += pairs((0, "SECTION"), (2, "BLOCKS")) + blocks + pairs((0, "ENDSEC"))
    return text + pairs((0, "SECTION"), (2, "ENTITIES")) + entities + pairs((0, "ENDSEC"), (0, "EOF"))


def point(code, xyz):
    return [(code + 10 * axis, float(c)) for axis, c in enumerate(xyz)]


def extreme(f, lo, hi, sign):
    """The least of sign * f on [lo, hi]."""
    ts = np.linspace(lo, hi, 4001)
    values = [sign * f(t) for t in ts]
    best = int(np.argmin(values))
    a, b = ts[max(best - 1, 0)], ts[min(best + 1, 4000)]
    found = minimize_scalar(lambda t: sign * f(t), bounds=(a, b), method="bounded", options={"xatol": 1e-13})
    return sign * min(found.fun, min(values))


def measured(name, text, curves):
    """`curves`: functions to (x, y) with the parameter ranges on which they are smooth."""
    points, length, boxes = [], 0.0, []
    for at, breaks in curves:
        for lo, hi in zip(breaks, breaks[1:]):
            step = (hi - lo) * 1e-6

            def speed(t):
                a, b = max(t - step, lo), min(t + step, hi)
                return math.dist(at(a), at(b)) / (b - a)

            length += quad(speed, lo, hi, epsabs=1e-9, epsrel=1e-9, limit=200)[0]
            box = [extreme(lambda t, i=i: at(t)[i], lo, hi, s) for s in (1, -1) for i in (0, 1)]
            boxes.append(box)
        for t in np.linspace(breaks[0], breaks[-1], POINTS):
            points.append([round(float(c), 12) for c in at(t)])
    box = [min(b[i] for b in boxes) for i in (0, 1)] + [max(b[i] for b in boxes) for i in (2, 3)]
    box = [round(float(c), 9) for c in box]
    return {"name": name, "dxf": text, "length": round(length, 6), "bbox": box, "points": points}


def spline(name, degree, knots, controls, weights=None, flags=8):
    text = pairs((0, "SPLINE"), (8, "0"), (70, flags), (71, degree), (72, len(knots)), (73, len(controls)))
    text += pairs(*[(40, float(k)) for k in knots])
    if weights is not None:
        text += pairs(*[(41, float(w)) for w in weights])
    for xy in controls:
        text += pairs(*point(10, (*xy, 0.0)))
    w = np.ones(len(controls)) if weights is None else np.array(weights, dtype=float)
    homogeneous = np.column_stack([np.array(controls, dtype=float) * w[:, None], w])
    curve = BSpline(np.array(knots, dtype=float), homogeneous, degree, extrapolate=False)

    def at(t):
        x, y, v = curve(min(t, np.nextafter(knots[len(controls)], -math.inf)))
        return x / v, y / v

    inside = sorted({float(k) for k in knots[degree : len(controls) + 1]})
    return measured(name, drawing(text), [(at, inside)])


def clamped(degree, inner, count):
    assert len(inner) == count - degree - 1
    return [0.0] * (degree + 1) + inner + [1.0] * (degree + 1)


def wandering(rng, count):
    return [(20.0 * i + rng.uniform(-9, 9), rng.uniform(-40, 40)) for i in range(count)]


def splines():
    rng = random.Random(7)
    yield spline("clamped cubic, uneven knots", 3, clamped(3, [0.1, 0.35, 0.8], 7), wandering(rng, 7))
    yield spline("quadratic", 2, clamped(2, [0.5], 4), [(10, 10), (10, 90), (90, 90), (90, 10)])
    yield spline("degree 1 is a polyline", 1, clamped(1, [0.25, 0.5], 4), wandering(rng, 4))
    yield spline("degree 5", 5, clamped(5, [0.3, 0.6], 8), wandering(rng, 8))
    yield spline("knots far from 0", 3, [k * 1e4 + 5e5 for k in clamped(3, [0.4], 5)], wandering(rng, 5))
    yield spline("corner by a threefold knot", 3, clamped(3, [0.5] * 3, 7), wandering(rng, 7))
    yield spline("rational, a quarter of a circle", 2, clamped(2, [], 3), [(50, 0), (50, 50), (0, 50)],
                 [1, math.sqrt(0.5), 1], 12)
    yield spline("rational, uneven weights", 3, clamped(3, [0.2, 0.7], 6), wandering(rng, 6), [1, 5, 0.3, 2, 1, 0.5], 12)
    ring = [(60 * math.cos(a), 40 * math.sin(a)) for a in np.linspace(0, 2 * math.pi, 9)[:-1]]
    yield spline("periodic cubic, wrapped control points", 3, [float(k) for k in range(-3, 12)], ring + ring[:3], None, 11)
    yield spline("unclamped, open", 3, [-2, -2, -1, 0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 9], wandering(rng, 10))
    for seed in range(6):
        rng = random.Random(100 + seed)
        degree, count = rng.choice([2, 3, 3, 4]), rng.randint(6, 12)
        inner = sorted(rng.uniform(0.02, 0.98) for _ in range(count - degree - 1))
        weights = [rng.uniform(0.2, 4) for _ in range(count)] if seed % 2 else None
        yield spline(f"random {seed}", degree, clamped(degree, inner, count), wandering(rng, count), weights)


def fitted(name, fits, flags, bc, tangents=()):
    text = pairs((0, "SPLINE"), (8, "0"), (70, flags), (71, 3), (74, len(fits)))
    for code, t in tangents:
        text += pairs(*point(code, (*t, 0.0)))
    for xy in fits:
        text += pairs(*point(11, (*xy, 0.0)))
    points = np.array(fits + [fits[0]] if flags & 1 else fits, dtype=float)
    chords = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(points, axis=0).T))])
    curve = CubicSpline(chords, points, bc_type=bc)
    return measured(name, drawing(text), [(lambda t: tuple(curve(t)), [float(c) for c in chords])])


def fits():
    fits = [(0, 0), (12, 20), (30, 18), (55, 2), (60, -30)]
    yield fitted("fit points, natural ends", fits, 8, "natural")
    ends = [(12, (0.0, 1.0)), (13, (-0.6, -0.8))]
    yield fitted("fit points, end tangents", fits, 8, ((1, np.array([0.0, 1.0])), (1, np.array([-0.6, -0.8]))), ends)
    yield fitted("fit points, closed", fits, 9, "periodic")
    yield fitted("two fit points", [(1, 2), (30, 40)], 8, "natural")


def by_ezdxf(text):
    with tempfile.NamedTemporaryFile("w", suffix=".dxf") as file:
        file.write(text)
        file.flush()
        return ezdxf.readfile(file.name)


def leaves(entity, doc, outer):
    """The entities that are no block references, each with the matrix that places it."""
    if entity.dxftype() != "INSERT":
        yield entity, outer
        return
    for copy in entity.multi_insert() if entity.mcount > 1 else [entity]:
        matrix = copy.matrix44() * outer
        for inner in doc.blocks[copy.dxf.name]:
            yield from leaves(inner, doc, matrix)


def curve_of(entity, matrix):
    """The placed curve as a function of its parameter, and its smooth ranges."""
    kind = entity.dxftype()
    if kind == "LINE":
        start, end = 0.0, 1.0

        def local(t):
            return entity.dxf.start.lerp(entity.dxf.end, t)

    elif kind == "ELLIPSE":
        tool = entity.construction_tool()
        start, end = tool.start_param, tool.end_param
        end += math.tau if end <= start else 0.0

        def local(t):
            return next(iter(tool.vertices([t])))

    else:
        start, end = (0.0, 360.0) if kind == "CIRCLE" else (entity.dxf.start_angle, entity.dxf.end_angle)
        end += 360.0 if end <= start else 0.0

        def local(t):
            return entity.ocs().to_wcs(entity.dxf.center + ezdxf.math.Vec3.from_deg_angle(t, entity.dxf.radius))

    def at(t):
        p = matrix.transform(local(t))
        return p.x, p.y

    return at, [start, end]


def placed(name, entities, blocks=""):
    text = drawing(entities, blocks)
    doc = by_ezdxf(text)
    found = [leaf for entity in doc.modelspace() for leaf in leaves(entity, doc, ezdxf.math.Matrix44())]
    return measured(name, text, [curve_of(entity, matrix) for entity, matrix in found])


def ellipse(name, centre, major, ratio, start, end, normal=(0, 0, 1)):
    text = pairs((0, "ELLIPSE"), (100, "AcDbEntity"), (8, "0"), (100, "AcDbEllipse"), *point(10, centre), *point(11, major),
                 *point(210, normal), (40, float(ratio)), (41, float(start)), (42, float(end)))
    return placed(name, text)


def ellipses():
    yield ellipse("whole ellipse", (5, 7, 0), (40, 0, 0), 0.5, 0, math.tau)
    yield ellipse("turned ellipse", (-3, 2, 0), (30, 20, 0), 0.3, 0, math.tau)
    yield ellipse("elliptic arc by parameter", (0, 0, 0), (50, 0, 0), 0.2, 0.3, 2.1)
    yield ellipse("elliptic arc over parameter 0", (0, 0, 0), (-40, -40, 0), 0.25, 1.8157749899, 7.0383931468)
    yield ellipse("elliptic arc with the end before the start", (0, 0, 0), (10, 30, 0), 0.7, 5.0, 1.0)
    yield ellipse("ellipse seen from below", (10, 5, 0), (30, 10, 0), 0.4, 0.5, 2.5, (0, 0, -1))
    yield ellipse("ellipse of ratio 1", (1, 1, 0), (0, 25, 0), 1.0, 0, math.tau)
    yield ellipse("slim ellipse", (0, 0, 0), (60, 25, 0), 0.01, 0, math.tau)
    yield ellipse("tilted ellipse", (0, 0, 0), (30, 0, 0), 0.6, 0.2, 4.0, (0, -0.6, 0.8))


def arc(centre, radius, start, end, normal=(0, 0, 1), layer="0"):
    return pairs((0, "ARC"), (8, layer), *point(10, centre), *point(210, normal), (40, float(radius)), (50, float(start)),
                 (51, float(end)))


def circle(centre, radius, normal=(0, 0, 1)):
    return pairs((0, "CIRCLE"), (8, "0"), *point(10, centre), *point(210, normal), (40, float(radius)))


def line(a, b):
    return pairs((0, "LINE"), (8, "0"), *point(10, a), *point(11, b))


def block(name, base, entities):
    head = pairs((0, "BLOCK"), (8, "0"), (2, name), (70, 0), *point(10, base), (3, name))
    return head + entities + pairs((0, "ENDBLK"), (8, "0"))


def insert(name, at, scale=(1, 1, 1), turn=0, grid=(1, 1), spacing=(0, 0), normal=(0, 0, 1)):
    return pairs((0, "INSERT"), (8, "0"), (2, name), *point(10, at), (41, float(scale[0])), (42, float(scale[1])),
                 (43, float(scale[2])), (50, float(turn)), (70, grid[0]), (71, grid[1]), (44, float(spacing[0])),
                 (45, float(spacing[1])), *point(210, normal))


def placements():
    below = (0, 0, -1)
    yield placed("arc seen from below", arc((5, 2, 0), 3, 0, 90, below))
    yield placed("circle in a tilted plane", circle((5, 2, 1), 3, (0.48, -0.36, 0.8)))
    yield placed("arc with an oblique normal", arc((5, 2, 1), 3, 20, 250, (1, 2, 3)))
    plate = block("PLATE", (4, -3, 0), line((0, 0, 0), (30, 5, 0)) + arc((10, 5, 0), 8, 350, 200) + circle((20, 9, 0), 5))
    yield placed("block with a base point", insert("PLATE", (100, 50, 0)), plate)
    yield placed("block turned and scaled", insert("PLATE", (1, 2, 0), (2, 2, 2), 30), plate)
    yield placed("block mirrored", insert("PLATE", (1, 2, 0), (-1, 1, 1), 30), plate)
    yield placed("block of unequal scales", insert("PLATE", (1, 2, 0), (3, 0.5, 1), 75), plate)
    yield placed("block seen from below", insert("PLATE", (10, 2, 0), (1, 2, 1), 40, normal=below), plate)
    yield placed("grid, turned and mirrored", insert("PLATE", (10, 20, 0), (2, -1, 1), 90, (3, 2), (70, 90)), plate)
    pair = plate + block("PAIR", (1, 1, 0), insert("PLATE", (20, 0, 0), (1, 0.4, 1), 20)
                         + insert("PLATE", (-20, 5, 0), (-1, 1, 1), 0))
    yield placed("nested, unequal scales", insert("PAIR", (7, 8, 0), (1.5, 1, 1), 10), pair)
    yield placed("nested, seen from below", insert("PAIR", (7, 8, 0), (1.5, 1.5, 1.5), 10, normal=below), pair)


if __name__ == "__main__":
    cases = [*splines(), *fits(), *ellipses(), *placements()]
    with_versions = {"numpy": np.__version__, "ezdxf": ezdxf.__version__, "cases": cases}
    print(json.dumps(with_versions, separators=(",", ":")).replace('{"name"', '\n{"name"'))
