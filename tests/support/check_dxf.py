#!/usr/bin/python3
"""Writes DXF drawings with ezdxf, reads them back with ezdxf and with our reader, and compares.

Usage: check_dxf.py DRAWING_FACTS SAMPLES_FOLDER WORK_FOLDER
Lengths and bounding boxes must agree to 1e-9 of the drawing's size. ezdxf parses the file and expands its blocks;
splines are evaluated by scipy, lengths by Gauss-Legendre quadrature here. Nothing of the reader under test is used.
"""
import json
import math
import pathlib
import random
import subprocess
import sys

import ezdxf
import numpy as np
from ezdxf.math import OCS, Vec3, bulge_to_arc
from scipy.interpolate import BSpline, CubicSpline
from scipy.optimize import minimize_scalar

GAUSS_X, GAUSS_W = np.polynomial.legendre.leggauss(48)
TOLERANCE = 1e-9
SEED = 20260


class Piece:
    """A smooth stretch: point(t) and rate(t) for arrays t, both giving shape (n, 2)."""

    def __init__(self, point, rate, low, high, straight=False):
        self.point, self.rate, self.low, self.high, self.straight = point, rate, low, high, straight

    def length(self):
        return self.between(self.low, self.high, self.by_gauss(self.low, self.high), 0)

    def by_gauss(self, low, high):
        half = 0.5 * (high - low)
        return half * math.fsum(GAUSS_W * np.hypot(*self.rate(low + half * (1 + GAUSS_X)).T))

    def between(self, low, high, whole, depth):
        """Halves until the halves agree with the whole: splines nearly stop at sharp bends."""
        middle = 0.5 * (low + high)
        left, right = self.by_gauss(low, middle), self.by_gauss(middle, high)
        if abs(left + right - whole) <= 1e-13 * abs(whole) + 1e-15 or depth > 40:
            return left + right
        return self.between(low, middle, left, depth + 1) + self.between(middle, high, right, depth + 1)

    def samples(self):
        t = np.linspace(self.low, self.high, 2 if self.straight else 129)
        return t, self.point(t)


def extreme(pieces, axis, sign):
    """The smallest sign * coordinate of all pieces: sampled, then polished wherever it might be undercut."""
    sampled = [(piece, *piece.samples()) for piece in pieces]
    best = min((sign * p[:, axis]).min() for _, _, p in sampled)
    for piece, t, p in sampled:
        if piece.straight:
            continue
        step = np.abs(np.diff(p[:, axis])).max()
        i = int(np.argmin(sign * p[:, axis]))
        if sign * p[i, axis] - step > best:
            continue
        found = minimize_scalar(lambda u: sign * piece.point(np.array([u]))[0, axis],
                                bounds=(t[max(i - 1, 0)], t[min(i + 1, len(t) - 1)]), method="bounded",
                                options={"xatol": 1e-13 * max(1.0, abs(t[i]))})
        best = min(best, found.fun)
    return sign * best


def straight(a, b):
    a, b = np.array([a[0], a[1]], float), np.array([b[0], b[1]], float)
    return Piece(lambda t: a + np.outer(t, b - a), lambda t: np.outer(np.ones_like(t), b - a), 0.0, 1.0, straight=True)


def turned(centre, u, v, low, high):
    c, u, v = (np.array([w[0], w[1]], float) for w in (centre, u, v))
    return Piece(lambda t: c + np.outer(np.cos(t), u) + np.outer(np.sin(t), v),
                 lambda t: -np.outer(np.sin(t), u) + np.outer(np.cos(t), v), low, high)


def arc_pieces(entity, whole):
    ocs = entity.ocs()
    r = entity.dxf.radius
    low, high = (0.0, 2 * math.pi) if whole else (math.radians(entity.dxf.start_angle), math.radians(entity.dxf.end_angle))
    while high <= low:
        high += 2 * math.pi
    while high - low > 2 * math.pi + 1e-12:
        high -= 2 * math.pi
    return [turned(ocs.to_wcs(entity.dxf.center), ocs.to_wcs(Vec3(r, 0, 0)), ocs.to_wcs(Vec3(0, r, 0)), low, high)]


def bulge_pieces(points, closed, ocs):
    pieces = []
    n = len(points)
    for i in range(n if closed else n - 1):
        (x0, y0, b), (x1, y1, _) = points[i], points[(i + 1) % n]
        if (x0, y0) == (x1, y1):
            continue
        if abs(b) < 1e-9:
            pieces.append(straight(ocs.to_wcs(Vec3(x0, y0)), ocs.to_wcs(Vec3(x1, y1))))
            continue
        centre, low, high, r = bulge_to_arc((x0, y0), (x1, y1), b)
        while high <= low:
            high += 2 * math.pi
        pieces.append(turned(ocs.to_wcs(Vec3(centre)), ocs.to_wcs(Vec3(r, 0, 0)), ocs.to_wcs(Vec3(0, r, 0)), low, high))
    return pieces


def spline_pieces(entity):
    poles = np.array([(p[0], p[1]) for p in entity.control_points])
    if len(poles) == 0:
        return fitted_pieces(entity)
    knots, p = np.array(entity.knots), entity.dxf.degree
    weights = np.array(entity.weights) if len(entity.weights) else np.ones(len(poles))
    top = BSpline(knots, poles * weights[:, None], p)
    bottom = BSpline(knots, weights, p)
    dtop, dbottom = top.derivative(), bottom.derivative()

    def point(t):
        return top(t) / bottom(t)[:, None]

    def rate(t):
        w = bottom(t)[:, None]
        return (dtop(t) - point(t) * dbottom(t)[:, None]) / w

    return between(point, rate, knots[p:len(poles) + 1])


def fitted_pieces(entity):
    points = np.array([(p[0], p[1]) for p in entity.fit_points])
    if entity.closed and not np.array_equal(points[0], points[-1]):
        points = np.vstack([points, points[:1]])
    u = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(points, axis=0).T))])
    if np.array_equal(points[0], points[-1]):
        kind = "periodic"
    else:
        ends = [entity.dxf.get("start_tangent"), entity.dxf.get("end_tangent")]
        kind = tuple((2, np.zeros(2)) if e is None else (1, np.array(
            (Vec3(e).normalize().x, Vec3(e).normalize().y))) for e in ends)
    curve = CubicSpline(u, points, bc_type=kind)
    return between(curve, curve.derivative(), u)


def between(point, rate, knots):
    knots = np.unique(knots)
    return [Piece(point, rate, a, b) for a, b in zip(knots[:-1], knots[1:])]


def pieces_of(entity):
    kind = entity.dxftype()
    if kind == "LINE":
        return [straight(entity.dxf.start, entity.dxf.end)]
    if kind in ("ARC", "CIRCLE"):
        return arc_pieces(entity, kind == "CIRCLE")
    if kind == "ELLIPSE":
        low, high = entity.dxf.start_param, entity.dxf.end_param
        while high <= low:
            high += 2 * math.pi
        return [turned(entity.dxf.center, entity.dxf.major_axis, entity.minor_axis, low, high)]
    if kind == "SPLINE":
        return spline_pieces(entity)
    if kind == "LWPOLYLINE":
        return bulge_pieces(list(entity.get_points("xyb")), entity.closed, entity.ocs())
    if kind == "POLYLINE":
        points = [(v.dxf.location.x, v.dxf.location.y, v.dxf.get("bulge", 0.0)) for v in entity.vertices]
        return bulge_pieces(points, entity.is_closed, entity.ocs() if entity.is_2d_polyline else OCS())
    if kind == "INSERT":
        out = []
        for one in entity.multi_insert() if entity.mcount > 1 else [entity]:
            for inner in one.virtual_entities():
                out += pieces_of(inner)
        return out
    return []


def hatch_pieces(hatch):
    """Loops by ezdxf's own edge objects, in object coordinates."""
    out, ocs = [], hatch.ocs()
    for path in hatch.paths:
        if hasattr(path, "vertices"):
            out += bulge_pieces([(v[0], v[1], v[2]) for v in path.vertices], path.is_closed, ocs)
            continue
        for edge in path.edges:
            kind = type(edge).__name__
            if kind == "LineEdge":
                out.append(straight(ocs.to_wcs(Vec3(edge.start)), ocs.to_wcs(Vec3(edge.end))))
            elif kind == "ArcEdge":
                low, high = math.radians(edge.start_angle), math.radians(edge.end_angle)
                while high <= low:
                    high += 2 * math.pi
                out.append(turned(ocs.to_wcs(Vec3(edge.center)), ocs.to_wcs(Vec3(edge.radius, 0)),
                                  ocs.to_wcs(Vec3(0, edge.radius)), low, high))
            elif kind == "EllipseEdge":
                low, high = edge.start_param, edge.end_param
                while high <= low:
                    high += 2 * math.pi
                major = Vec3(edge.major_axis)
                minor = Vec3(-major.y, major.x) * edge.ratio
                out.append(turned(ocs.to_wcs(Vec3(edge.center)), ocs.to_wcs(major), ocs.to_wcs(minor), low, high))
            else:
                out += spline_pieces(SplineEdgeView(edge))
    return out


class SplineEdgeView:
    """A hatch's spline edge with the names that a SPLINE entity has."""

    def __init__(self, edge):
        self.control_points = edge.control_points
        self.knots = edge.knot_values
        self.weights = edge.weights
        self.dxf = type("Dxf", (), {"degree": edge.degree})


def facts_by_us(program, path, *flags):
    text = subprocess.run([program, *flags, str(path)], capture_output=True, text=True, check=True).stdout
    return json.loads(text)


def facts_by_ezdxf(path, hatch=False):
    pieces = []
    for entity in ezdxf.readfile(path).modelspace():
        if hatch and entity.dxftype() == "HATCH":
            pieces += hatch_pieces(entity)
        else:
            pieces += pieces_of(entity)
    box = (extreme(pieces, 0, 1.0), extreme(pieces, 1, 1.0), extreme(pieces, 0, -1.0), extreme(pieces, 1, -1.0))
    return math.fsum(p.length() for p in pieces), box


failures = []
checked = 0


def compare(program, path, *flags, skipped=0):
    global checked
    checked += 1
    ours = facts_by_us(program, path, *flags)
    if "error" in ours:
        failures.append(f"{path.name}: {ours['error']}")
        return
    length, box = facts_by_ezdxf(path, hatch="--hatch" in flags)
    size = max(box[2] - box[0], box[3] - box[1], 1e-12)
    if abs(ours["length"] - length) > TOLERANCE * length:
        failures.append(f"{path.name}: length {ours['length']!r} against {length!r}")
    for a, b in zip(ours["bounds"], box):
        if abs(a - b) > TOLERANCE * size:
            failures.append(f"{path.name}: bounds {ours['bounds']} against {box}")
            break
    if ours["skipped"] != skipped:
        failures.append(f"{path.name}: {ours['skipped']} entities were skipped, {skipped} expected")


# --- drawings -------------------------------------------------------------------------------------------------------

def random_knots(rng, poles, degree):
    inner = sorted(rng.uniform(0, 1) for _ in range(poles - degree - 1))
    if len(inner) > 2 and degree > 2:
        inner[1] = inner[0]  # a double knot
    return [0.0] * (degree + 1) + inner + [1.0] * (degree + 1)


def add_primitives(space, rng, count, spread=100.0):
    def at():
        return rng.uniform(-spread, spread), rng.uniform(-spread, spread)

    for _ in range(count):
        kind = rng.randrange(8)
        if kind == 0:
            space.add_line(at(), at())
        elif kind == 1:
            space.add_circle(at(), rng.uniform(0.1, 30))
        elif kind == 2:
            space.add_arc(at(), rng.uniform(0.1, 30), rng.uniform(-360, 360), rng.uniform(-360, 360))
        elif kind == 3:
            angle = rng.uniform(0, 6.28)
            start = rng.uniform(0, 6.28)
            space.add_ellipse(at(), major_axis=(20 * math.cos(angle), 20 * math.sin(angle)), ratio=rng.uniform(0.05, 1),
                              start_param=start, end_param=start + rng.uniform(0.1, 6.2))
        elif kind == 4:
            degree = rng.randrange(2, 6)
            n = rng.randrange(degree + 1, degree + 9)
            spline = space.add_spline(degree=degree)
            spline.control_points = [(*at(), 0) for _ in range(n)]
            spline.knots = random_knots(rng, n, degree)
            if rng.random() < 0.5:
                spline.weights = [rng.uniform(0.3, 4) for _ in range(n)]
                spline.dxf.flags |= 4
        elif kind == 5:
            spline = space.add_spline(degree=3)
            spline.set_closed([(*at(), 0) for _ in range(rng.randrange(5, 12))], degree=3)
        elif kind == 6:
            points = [(*at(), rng.choice([0, 0, 1, -1, rng.uniform(-3, 3), 1e-3, -1e-6])) for _ in range(rng.randrange(2, 9))]
            space.add_lwpolyline(points, format="xyb", close=rng.random() < 0.5)
        else:
            points = [(*at(), rng.uniform(-1, 1)) for _ in range(rng.randrange(2, 6))]
            space.add_polyline2d(points, format="xyb", close=rng.random() < 0.5)


def blocks_drawing(rng, version="R2000"):
    """Nested blocks, mirrored, turned, scaled unevenly, arrayed, with base points, and seen from behind."""
    doc = ezdxf.new(version)
    inner = doc.blocks.new("Inner", base_point=(3, -2))
    add_primitives(inner, rng, 8, 20)
    middle = doc.blocks.new("MIDDLE", base_point=(-1, 5))
    middle.add_blockref("inner", (4, 4), dxfattribs={"xscale": -1.5, "yscale": 1.5, "rotation": 33})
    middle.add_blockref("INNER", (-9, 2), dxfattribs={"xscale": 0.5, "yscale": -0.5, "rotation": 200})
    add_primitives(middle, rng, 3, 20)
    msp = doc.modelspace()
    msp.add_blockref("Middle", (10, 20), dxfattribs={"rotation": -72, "xscale": 2, "yscale": 2})
    msp.add_blockref("Middle", (-40, 7), dxfattribs={"xscale": -1})
    msp.add_blockref("Inner", (0, 0), dxfattribs={"rotation": 15, "row_count": 3, "column_count": 4, "row_spacing": 31,
                                                   "column_spacing": -17})
    msp.add_blockref("Inner", (60, 3), dxfattribs={"extrusion": (0, 0, -1), "rotation": 50, "xscale": 1.25,
                                                    "yscale": 1.25})
    return doc


def uneven_drawing(rng):
    """Uneven scales: circles become ellipses, and are turned after that."""
    doc = ezdxf.new("R2010")
    block = doc.blocks.new("b", base_point=(1, 1))
    block.add_circle((3, 4), 5)
    block.add_arc((0, 0), 7, 20, 250)
    block.add_line((0, 0), (9, 2))
    block.add_ellipse((2, 2), major_axis=(6, 1), ratio=0.4, start_param=0.5, end_param=4.0)
    spline = block.add_spline(degree=3)
    spline.control_points = [(0, 0, 0), (3, 8, 0), (9, -4, 0), (12, 5, 0)]
    spline.knots = [0, 0, 0, 0, 1, 1, 1, 1]
    block.add_lwpolyline([(0, 0, 0.7), (5, 0, -0.2), (5, 5, 0)], format="xyb")
    msp = doc.modelspace()
    for _ in range(6):
        msp.add_blockref("b", (rng.uniform(-50, 50), rng.uniform(-50, 50)), dxfattribs={
            "xscale": rng.choice([-1, 1]) * rng.uniform(0.3, 3), "yscale": rng.choice([-1, 1]) * rng.uniform(0.3, 3),
            "rotation": rng.uniform(0, 360)})
    return doc


def behind_drawing(rng):
    """Entities in object coordinates with the extrusion turned round."""
    doc = ezdxf.new("R2000")
    msp = doc.modelspace()
    back = {"extrusion": (0, 0, -1)}
    msp.add_arc((10, 5), 8, 30, 200, dxfattribs=back)
    msp.add_circle((-20, 5), 8, dxfattribs=back)
    msp.add_lwpolyline([(0, 0, 0.4), (10, 0, -1), (10, 12, 0)], format="xyb", close=True, dxfattribs=back)
    msp.add_ellipse((5, 40), major_axis=(9, 3), ratio=0.5, start_param=0.3, end_param=3.3, dxfattribs=back)
    msp.add_polyline2d([(0, 0, 0.4), (20, 3, 0.2), (25, 30, 0)], format="xyb", dxfattribs=back)
    msp.add_line((1, 2), (rng.uniform(3, 30), 40), dxfattribs=back)
    # Flat, though given in space, at any height and with any extrusion of a line.
    msp.add_line((1, 2, 7), (30, 4, 7), dxfattribs={"extrusion": (0, 1, 0)})
    msp.add_polyline3d([(0, 0, 3), (40, 1, 3), (41, 22, 3)])
    msp.add_circle((0, 0, 5), 4)
    return doc


def fitted_drawing(rng):
    doc = ezdxf.new("R2000")
    msp = doc.modelspace()
    for closed in (False, True):
        points = [(30 * math.cos(a) + rng.uniform(-4, 4), 20 * math.sin(a) + rng.uniform(-4, 4))
                  for a in np.linspace(0.1, 5.9, 14)]
        spline = msp.add_spline(fit_points=points)
        spline.closed = closed
    spline = msp.add_spline(fit_points=[(0, 0), (10, 15), (30, 10), (44, 0)])
    spline.dxf.start_tangent = (0, 3, 0)
    spline.dxf.end_tangent = (2, -2, 0)
    return doc


def hatch_drawing(rng):
    doc = ezdxf.new("R2010")
    msp = doc.modelspace()
    hatch = msp.add_hatch()
    hatch.paths.add_polyline_path([(0, 0, 0.3), (40, 0), (40, 30, -0.5), (0, 30)], is_closed=True)
    edges = hatch.paths.add_edge_path()
    edges.add_line((5, 5), (15, 5))
    edges.add_arc((15, 10), radius=5, start_angle=-90, end_angle=90, ccw=True)
    edges.add_line((15, 15), (5, 15))
    edges.add_arc((5, 10), radius=5, start_angle=90, end_angle=270, ccw=True)
    turned_back = hatch.paths.add_edge_path()
    turned_back.add_arc((60, 60), radius=6, start_angle=20, end_angle=170, ccw=False)
    turned_back.add_ellipse((80, 20), major_axis=(9, 4), ratio=0.4, start_angle=10, end_angle=200, ccw=True)
    turned_back.add_ellipse((80, 50), major_axis=(9, -4), ratio=0.4, start_angle=30, end_angle=280, ccw=False)
    turned_back.add_spline(control_points=[(0, 50), (10, 70), (20, 30), (30, 50), (40, 60)], degree=3,
                           knot_values=[0, 0, 0, 0, 0.4, 1, 1, 1, 1])
    behind = msp.add_hatch(dxfattribs={"extrusion": (0, 0, -1)})
    behind.paths.add_polyline_path([(0, 0, 0.3), (rng.uniform(20, 40), 0), (9, 30)], is_closed=True)
    return doc


def main():
    program, samples, work = sys.argv[1], pathlib.Path(sys.argv[2]), pathlib.Path(sys.argv[3])
    work.mkdir(parents=True, exist_ok=True)

    def check(doc, name, *flags, fmt="asc", skipped=0):
        path = work / f"{name}.dxf"
        doc.saveas(path, fmt=fmt)
        compare(program, path, *flags, skipped=skipped)

    for path in sorted(samples.glob("*.dxf")):
        compare(program, path)
    for seed in range(SEED, SEED + 12):
        rng = random.Random(seed)
        doc = ezdxf.new("R2000")
        add_primitives(doc.modelspace(), rng, 30)
        check(doc, f"primitives_{seed}")
        check(blocks_drawing(rng), f"blocks_{seed}")
        check(uneven_drawing(rng), f"uneven_{seed}")
        check(fitted_drawing(rng), f"fitted_{seed}")
    rng = random.Random(SEED)
    check(behind_drawing(rng), "behind")
    check(hatch_drawing(rng), "hatch", "--hatch")
    for version in ("R2000", "R2004", "R2007", "R2010", "R2013", "R2018"):
        for fmt in ("asc", "bin"):
            check(blocks_drawing(random.Random(SEED), version), f"version_{version}_{fmt}", fmt=fmt)
    for fmt in ("asc", "bin"):
        doc = ezdxf.new("R12")
        msp = doc.modelspace()
        block = doc.blocks.new("HOLE", base_point=(1, 0))
        block.add_circle((0, 0), 2.5)
        block.add_arc((0, 0), 4, 10, 95)
        msp.add_blockref("HOLE", (10, 10), dxfattribs={"xscale": -2, "yscale": 2, "rotation": 40})
        msp.add_polyline2d([(0, 0, 0.4), (20, 3, 0.2), (25, 30, 0)], format="xyb")
        msp.add_line((0, 0), (7, 7))
        check(doc, f"version_R12_{fmt}", fmt=fmt)

    for failure in failures:
        print("FAIL", failure)
    print(f"{checked} drawings compared, {len(failures)} differences, seeds {SEED} to {SEED + 11}")
    sys.exit(1 if failures or checked < 60 else 0)


if __name__ == "__main__":
    main()
