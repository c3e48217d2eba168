#!/usr/bin/python3
"""Makes the drawings in samples/: an invented workshop for wooden boats. Lengths in mm unless a drawing says inches.

Run from the top of the repository: /usr/bin/python3 tests/support/make_samples.py
"""
import math
import pathlib
import sys

import ezdxf

OUT = pathlib.Path(sys.argv[1] if len(sys.argv) > 1 else "samples")


def new(units):
    doc = ezdxf.new("R2000")
    doc.header["$INSUNITS"] = units
    return doc, doc.modelspace()


def save(doc, name):
    doc.saveas(OUT / name)


def rounded(msp, x0, y0, x1, y1, r, layer):
    """A rectangle with rounded corners, as loose lines and arcs in no particular order."""
    att = {"layer": layer}
    msp.add_line((x1, y1 - r), (x1, y0 + r), dxfattribs=att)
    msp.add_line((x0 + r, y0), (x1 - r, y0), dxfattribs=att)
    msp.add_line((x0, y0 + r), (x0, y1 - r), dxfattribs=att)
    msp.add_line((x1 - r, y1), (x0 + r, y1), dxfattribs=att)
    for cx, cy, a in ((x1 - r, y1 - r, 0), (x0 + r, y1 - r, 90), (x0 + r, y0 + r, 180), (x1 - r, y0 + r, 270)):
        msp.add_arc((cx, cy), r, a, a + 90, dxfattribs=att)


def rib_template():
    """Half rib of a dinghy: a spline for the planking line, straight keel and sheer, and an arc of the limber hole."""
    doc, msp = new(4)
    msp.add_open_spline([(0, 40), (60, 22), (180, 20), (320, 60), (420, 170), (455, 300), (462, 380)], degree=3)
    msp.add_line((462, 380), (418, 380))
    msp.add_open_spline([(418, 380), (412, 300), (378, 190), (296, 98), (180, 62), (90, 62), (26, 72)], degree=3)
    msp.add_arc((0, 72), 26, 270, 360)
    msp.add_line((0, 46), (0, 40))
    save(doc, "rib_template.dxf")


def gasket():
    """Water-pump gasket: rounded outline, an elliptic port and six bolt holes placed as blocks."""
    doc, msp = new(4)
    rounded(msp, 0, 0, 160, 100, 18, "outline")
    msp.add_ellipse((80, 50), major_axis=(46, 0), ratio=0.62, dxfattribs={"layer": "port"})
    hole = doc.blocks.new("bolt")
    hole.add_circle((0, 0), 4.5)
    for x in (18, 80, 142):
        for y in (14, 86):
            msp.add_blockref("bolt", (x, y), dxfattribs={"layer": "holes"})
    msp.add_text("2 mm cork, 4 off", dxfattribs={"layer": "notes", "height": 6}).set_placement((20, -14))
    save(doc, "gasket.dxf")


def cam_plate():
    """Cam of a sheet-winch pawl: a base circle with a cycloidal rise and fall as a closed fitted curve, and a keyed bore."""
    doc, msp = new(4)
    points = []
    for i in range(72):
        a = 2 * math.pi * i / 72
        lift = 0.0
        if 0.5 < a < 2.3:
            u = (a - 0.5) / 1.8
            lift = 14 * (u - math.sin(2 * math.pi * u) / (2 * math.pi))
        elif 2.3 <= a <= 3.2:
            lift = 14.0
        elif 3.2 < a < 5.2:
            u = (a - 3.2) / 2.0
            lift = 14 * (1 - u + math.sin(2 * math.pi * u) / (2 * math.pi))
        r = 34 + lift
        points.append((r * math.cos(a), r * math.sin(a)))
    points.append(points[0])
    spline = msp.add_spline(fit_points=points, degree=3, dxfattribs={"layer": "cam"})
    spline.closed = True
    w, depth, r = 3.0, 15.4, 12.0
    x = math.sqrt(r * r - w * w)
    a = math.degrees(math.atan2(w, x))
    msp.add_arc((0, 0), r, a, 360 - a, dxfattribs={"layer": "bore"})
    msp.add_lwpolyline([(x, w), (depth, w), (depth, -w), (x, -w)], dxfattribs={"layer": "bore"})
    save(doc, "cam_plate.dxf")


def name_board():
    """Scrolled name board for the dinghy KITTIWAKE, drawn in inches: volutes at both ends, the left one a mirrored block."""
    doc, msp = new(1)
    scroll = doc.blocks.new("scroll")
    points = []
    for i in range(0, 61):
        t = i / 60
        angle = math.pi / 2 - 2.25 * math.pi * t
        r = 1.6 * math.exp(-1.35 * t)
        points.append((r * math.cos(angle), r * math.sin(angle)))
    scroll.add_spline(fit_points=points, degree=3)
    msp.add_blockref("scroll", (9.0, 0.4))
    msp.add_blockref("scroll", (-9.0, 0.4), dxfattribs={"xscale": -1.0})
    msp.add_line((-9, 2), (9, 2))
    msp.add_lwpolyline([(-9, -1.5, 0, 0, 0.12), (0, -1.9, 0, 0, 0.12), (9, -1.5, 0, 0, 0)], format="xyseb")
    save(doc, "name_board.dxf")


def propeller_template():
    """Pitch template of a propeller blade: a rational spline that is an exact ellipse quarter, tangent arcs and lines."""
    doc, msp = new(4)
    w = math.sqrt(0.5)
    leading = msp.add_spline(degree=2)
    leading.set_open_rational([(0, 60), (0, 0), (130, 0)], weights=[1, w, 1], degree=2)
    msp.add_line((130, 0), (170, 0))
    msp.add_arc((170, 14), 14, 270, 90)
    msp.add_line((170, 28), (140, 28))
    msp.add_open_spline([(140, 28), (100, 28), (64, 44), (44, 74), (30, 95), (12, 96)], degree=3)
    msp.add_line((12, 96), (0, 84))
    msp.add_line((0, 84), (0, 60))
    save(doc, "propeller_template.dxf")


def oar_blade():
    """Outline of a spoon oar blade, in a drawing that does not say its unit (mm): four entities, curvature-continuous tip."""
    doc, msp = new(0)
    msp.add_open_spline([(0, 19), (120, 21), (200, 60), (330, 88), (470, 86), (540, 78), (560, 40), (560, 0)], degree=3)
    msp.add_open_spline([(560, 0), (560, -40), (540, -78), (470, -86), (330, -88), (200, -60), (120, -21), (0, -19)], degree=3)
    msp.add_line((0, -19), (-80, -19))
    msp.add_lwpolyline([(-80, -19), (-80, 19), (0, 19)])
    save(doc, "oar_blade.dxf")


def deck_inlay():
    """Compass-rose deck inlay: one closed outline traced as 5,000 short lines, the kind that a scanner hands over."""
    doc, msp = new(4)
    n = 5000
    points = []
    for i in range(n):
        a = 2 * math.pi * i / n
        r = 180 + 34 * math.cos(8 * a) + 9 * math.cos(16 * a) + 5 * math.sin(3 * a)
        points.append((round(r * math.cos(a), 6), round(r * math.sin(a), 6)))
    # Written in a scattered order and with every third line turned round: a reader has to chain them.
    for i in range(n):
        j = (i * 2311) % n
        a, b = points[j], points[(j + 1) % n]
        msp.add_line(*((b, a) if j % 3 == 0 else (a, b)), dxfattribs={"layer": "inlay"})
    doc.header["$INSUNITS"] = 4
    save(doc, "deck_inlay.dxf")


def centreboard_points():
    """A digitised centreboard section as points, mm."""
    rows = ["# centreboard section, digitised, mm", "x_mm,y_mm"]
    section = lambda x: 5 * 0.12 * 300 * (0.2969 * math.sqrt(x) - 0.126 * x - 0.3516 * x**2 + 0.2843 * x**3 - 0.1036 * x**4)
    xs = [0.5 * (1 - math.cos(math.pi * i / 90)) for i in range(91)]
    loop = [(300 * x, section(x)) for x in reversed(xs)] + [(300 * x, -section(x)) for x in xs[1:]]
    loop[-1] = loop[0]
    rows.insert(1, f"# points {len(loop)}")
    rows += [f"{x:.4f},{y:.4f}" for x, y in loop]
    (OUT / "centreboard_points.csv").write_text("\n".join(rows) + "\n")


if __name__ == "__main__":
    ezdxf.options.write_fixed_meta_data_for_testing = True  # the same bytes each time
    for make in (rib_template, gasket, cam_plate, name_board, propeller_template, oar_blade, deck_inlay, centreboard_points):
        make()
