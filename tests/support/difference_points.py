#!/usr/bin/python3
"""Differences an exported point list (sampled by time) and reports the worst use of each limit. Shares no code with the program.

Usage: difference_points.py POINTS.csv LIMITS.json   ->  one JSON object on standard output.
mm, s. Only positions and times are used: what the list says about feed and acceleration is compared, not believed.
"""
import csv
import json
import sys

import numpy


def read_points(path):
    """contour number -> (t, xy, feed) in mm/s."""
    with open(path, encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(line for line in file if not line.startswith("#")))
    contours = {}
    for row in rows:
        contours.setdefault(int(row["contour"]), []).append(
            tuple(float(row[key]) for key in ("t_s", "x_mm", "y_mm", "feed_mm_per_min", "s_mm")))
    return {number: numpy.array(points) for number, points in contours.items()}


def uses(points, limits, sustained=1):
    """Largest use of each limit, 1 is the limit itself, from central differences of equally spaced samples; with
    `sustained` the largest that so many neighbouring samples all reach.

    Acceleration from positions averages over two steps, so a corner of the motion (a stop, a switch from braking to
    speeding up) shows the mean of both sides: never more than the larger of them.
    """
    t, xy = points[:, 0], points[:, 1:3]
    step = t[1] - t[0]
    even = numpy.abs(numpy.diff(t) - step) < 1e-8  # rows off the grid: the exact end, and beside a stop
    middle = numpy.flatnonzero(even[1:] & even[:-1]) + 1
    velocity = (xy[middle + 1] - xy[middle - 1]) / (2 * step)
    acceleration = (xy[middle + 1] - 2 * xy[middle] + xy[middle - 1]) / step**2
    speed = numpy.linalg.norm(velocity, axis=1)
    moving = speed > 1e-3
    tangent = velocity[moving] / speed[moving, None]
    across = numpy.abs(tangent[:, 0] * acceleration[moving, 1] - tangent[:, 1] * acceleration[moving, 0])
    along = numpy.abs(numpy.diff(speed)[numpy.diff(middle) == 1]) / step
    found = {}

    def offer(name, values, limit, scale=1.0):
        if limit is not None:
            for _ in range(sustained - 1):
                values = numpy.minimum(values[1:], values[:-1])
            found[name] = float(numpy.max(values, initial=0.0) / (limit * scale))

    axes, path = limits["axes"], limits["path"]
    for i, axis in enumerate("XY"):
        offer(f"axis-speed-{axis}", numpy.abs(velocity[:, i]), axes[axis].get("speed_mm_per_min"), 1 / 60)
        offer(f"axis-acceleration-{axis}", numpy.abs(acceleration[:, i]), axes[axis].get("acceleration_mm_per_s2"))
    offer("feed", speed, path.get("feed_mm_per_min"), 1 / 60)
    offer("centripetal", across, path.get("centripetal_acceleration_mm_per_s2"))
    offer("tangential-acceleration", along, path.get("tangential_acceleration_mm_per_s2"))
    if moving.any():
        found["feed-column-error"] = float(numpy.max(numpy.abs(points[middle, 3] / 60 - speed)[moving]))
    return found


def main():
    with open(sys.argv[2], encoding="utf-8") as file:
        limits = json.load(file)
    worst = {}
    for number, points in read_points(sys.argv[1]).items():
        assert (numpy.diff(points[:, 0]) > 0).all() and (numpy.diff(points[:, 4]) > 0).all(), number
        for name, use in uses(points, limits).items():
            worst[name] = max(worst.get(name, 0.0), use)
    json.dump(worst, sys.stdout, indent=1)


if __name__ == "__main__":
    main()
