"""The plan against a general LP solver on the same nodes, for smooth closed contours."""
import json
import math
import subprocess

import ezdxf
import numpy

from driving import BIN, InAFolder
from linear_program import Problem

LIMITS = {"format": "kappafeed-limits", "version": 1, "name": "test",
          "axes": {"X": {"speed_mm_per_min": 18000, "acceleration_mm_per_s2": 1000},
                   "Y": {"speed_mm_per_min": 15000, "acceleration_mm_per_s2": 800}},
          "path": {"feed_mm_per_min": 9000, "centripetal_acceleration_mm_per_s2": 600,
                   "tangential_acceleration_mm_per_s2": 900}}


def radial(radius):
    points = [(radius(a) * math.cos(a), radius(a) * math.sin(a)) for a in (2 * math.pi * i / 90 for i in range(90))]
    return points + points[:1]


CONTOURS = {"ellipse": lambda space: space.add_ellipse((3, 4), major_axis=(40, 30), ratio=0.6),
            "egg": lambda space: space.add_spline(radial(lambda a: 40 + 9 * math.cos(a)), dxfattribs={"flags": 11}),
            "clover": lambda space: space.add_spline(radial(lambda a: 50 + 12 * math.cos(3 * a)), dxfattribs={"flags": 11}),
            "cam": lambda space: space.add_spline(radial(lambda a: 34 + 7 * math.exp(-4 * (a - 3) ** 2)),
                                                  dxfattribs={"flags": 11}),
            "star": lambda space: space.add_spline(radial(lambda a: 60 + 6 * math.cos(8 * a) + 4 * math.sin(3 * a)),
                                                   dxfattribs={"flags": 11})}


class SecondOrderPlan(InAFolder):
    def test_is_as_fast_as_the_solvers_and_near_its_bound(self):
        limits = self.file("limits.json", json.dumps(LIMITS))
        for name, draw in CONTOURS.items():
            document = ezdxf.new("R2000")
            document.header["$INSUNITS"] = 4
            draw(document.modelspace())
            drawing = self.folder / f"{name}.dxf"
            document.saveas(drawing)
            nodes = json.loads(subprocess.run([BIN / "dump_plan", drawing, limits, "2000"], capture_output=True,
                                              check=True).stdout)
            problem = Problem(nodes, LIMITS)
            q = problem.cap * 0 + nodes["q"]
            best = problem.best()
            bound = problem.lower_bound(q)
            fastest = problem.time(best)
            print(f"{name}: {len(q)} nodes, plan {nodes['time']:.6f} s, solver {fastest:.6f} s, solver's bound {bound:.6f} s, "
                  f"own bound {nodes['lower_bound']:.6f} s, excess {problem.excess(q):.1e}")
            with self.subTest(contour=name):
                self.assertTrue(nodes["closed"])
                self.assertGreater(len(q), 1900)
                self.assertAlmostEqual(problem.time(q), nodes["time"], delta=1e-9 * nodes["time"])
                self.assertLessEqual(problem.excess(q), 1e-5)  # the planner's middles are Hermite, these exact
                self.assertLessEqual(nodes["time"], fastest * (1 + 1e-3))
                self.assertLessEqual(nodes["time"], bound * (1 + 1e-3))
                # The planner's caps also hold inside the cells, so they lie at or below those written here; under
                # the same caps its lower bound is below what the solver finds.
                caps = numpy.array(nodes["cap_q"])
                self.assertLessEqual(numpy.max(caps[1:-1] / problem.cap[1:-1]), 1 + 1e-9)
                problem.cap = numpy.minimum(problem.cap, caps)
                self.assertLessEqual(nodes["lower_bound"], problem.time(problem.best()) * (1 + 1e-6))
