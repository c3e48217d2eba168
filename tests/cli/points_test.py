"""The exported point list, read back and differenced by a script that shares no code with the program."""
import json

import numpy

from driving import ROUTER, SAMPLES, InAFolder, kfeed
from difference_points import read_points, uses

LARGEST_EXCESS = 1e-3  # what is promised: no limit exceeded by more than 0.1 %
# A contour traced as thousands of short lines is driven through blends of some micrometres. There the acceleration between
# the rows of a cell exceeds its limit by 0.21 % as measured; and a turn below 1e-4 rad passes as smooth, which is a blip of
# two samples when differenced. So for it three samples in a row have to exceed, and by more than a quarter of a per cent.
TRACED, TRACED_EXCESS, TRACED_SAMPLES = "deck_inlay", 2.5e-3, 3


class SampledMotion(InAFolder):
    def test_keeps_every_limit(self):
        limits = json.loads(ROUTER.read_text())
        for drawing in sorted(SAMPLES.glob("*.dxf")):
            for joints in ("blend", "exact"):
                path = self.folder / f"{drawing.stem}-{joints}.csv"
                run = kfeed("plan", drawing, "--units", "mm", "--limits", ROUTER, "--law", "acceleration", "--joints", joints,
                            "--sample", "time", "--step", "0.0001", "--points", path, "--quiet")
                self.assertEqual(run.code, 0, run.err)
                traced = drawing.stem == TRACED
                for number, points in read_points(path).items():
                    for name, use in uses(points, limits, TRACED_SAMPLES if traced else 1).items():
                        if name == "feed-column-error":
                            continue
                        with self.subTest(drawing=drawing.name, joints=joints, contour=number, limit=name):
                            self.assertLessEqual(use, 1 + (TRACED_EXCESS if traced else LARGEST_EXCESS))
                path.unlink()

    def test_uses_up_the_limits_that_it_names(self):
        # A checker that can't fail proves nothing: what binds is found at its limit, so half the limit would be exceeded.
        path = self.folder / "a.csv"
        kfeed("plan", SAMPLES / "cam_plate.dxf", "--limits", ROUTER, "--law", "acceleration", "--step", "0.0001",
              "--points", path, "--quiet")
        worst = {}
        for points in read_points(path).values():
            for name, use in uses(points, json.loads(ROUTER.read_text())).items():
                worst[name] = max(use, worst.get(name, 0))
        for name in ("feed", "centripetal", "tangential-acceleration", "axis-acceleration-Y"):
            self.assertGreater(worst[name], 0.99, name)

    def test_ends_where_it_says_and_rises_strictly(self):
        for sampling, step in (("time", "0.003"), ("length", "0.25"), ("chord", "0.01")):
            path = self.folder / f"{sampling}.csv"
            summary = json.loads(kfeed("plan", SAMPLES / "name_board.dxf", "--limits", ROUTER, "--sample", sampling,
                                       "--step", step, "--points", path, "--json").out)
            contours = read_points(path)
            self.assertEqual(len(contours), len(summary["contours"]))
            for contour in summary["contours"]:
                points = contours[contour["number"]]
                self.assertTrue((numpy.diff(points[:, 0]) > 0).all() and (numpy.diff(points[:, 4]) > 0).all())
                self.assertAlmostEqual(points[-1, 0], contour["time_s"], delta=1e-9)
                self.assertAlmostEqual(points[-1, 4], contour["length_mm"], delta=1e-6)
