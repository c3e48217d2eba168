"""Plans given nodes with a general LP solver (scipy's HiGHS), and proves how near to the optimum a given plan is.

The unknowns are q = v^2 at the nodes, linear in each cell. The rows are written from the definitions: with q' the slope
of q in a cell, axis acceleration is t q'/2 + n q at both ends and in the middle of the cell, t the tangent's component and n
that of the curvature vector. Time is the convex function T(q) = sum of 2 h / (v_i + v_(i+1)). mm, s.
"""
import numpy
from scipy import sparse
from scipy.optimize import linprog


class Problem:
    def __init__(self, nodes, limits):
        self.s = numpy.array(nodes["s"])
        tangent = {"X": numpy.array(nodes["tx"]), "Y": numpy.array(nodes["ty"])}
        k = numpy.array(nodes["k"])
        bend = {"X": -k * tangent["Y"], "Y": k * tangent["X"]}
        middle = {"X": numpy.array(nodes["mid_tx"]), "Y": numpy.array(nodes["mid_ty"])}
        middle_k = numpy.array(nodes["mid_k"])
        middle_bend = {"X": -middle_k * middle["Y"], "Y": middle_k * middle["X"]}
        n = len(self.s)
        step = numpy.diff(self.s)
        self.cells = numpy.flatnonzero(step > 0)
        self.h = step[self.cells]
        # Caps on the speed itself.
        cap = numpy.full(n, (limits["path"]["feed_mm_per_min"] / 60.0) ** 2)
        for axis in "XY":
            part = numpy.maximum(numpy.abs(tangent[axis]), 1e-12)
            cap = numpy.minimum(cap, (limits["axes"][axis]["speed_mm_per_min"] / 60.0 / part) ** 2)
        centripetal = limits["path"].get("centripetal_acceleration_mm_per_s2")
        if centripetal:
            cap = numpy.minimum(cap, centripetal / numpy.maximum(numpy.abs(k), 1e-12))
        # In each cell q stays below the centripetal cap in the middle as well.
        if centripetal:
            for i in numpy.flatnonzero(numpy.diff(self.s) > 0):
                inside = centripetal / max(abs(middle_k[i]), 1e-12)
                if inside < min(cap[i], cap[i + 1]):
                    cap[i] = cap[i + 1] = inside
        cap[[0, -1]] = 0.0
        self.cap = cap
        # Rows |a q_i + b q_(i+1)| <= limit, and equal q on both sides of a break.
        rows, columns, values, bounds = [], [], [], []

        def add(coefficients, limit):
            for sign in (1.0, -1.0):
                row = len(bounds)
                for column, value in coefficients:
                    rows.append(row)
                    columns.append(column)
                    values.append(sign * value)
                bounds.append(limit)

        along = limits["path"].get("tangential_acceleration_mm_per_s2")
        for i, h in zip(self.cells, self.h):
            for axis in "XY":
                limit = limits["axes"][axis]["acceleration_mm_per_s2"]
                for end in (i, i + 1):
                    t = tangent[axis][end] / (2 * h)
                    weights = {i: -t, i + 1: t}
                    weights[end] += bend[axis][end]
                    add(list(weights.items()), limit)
                t = middle[axis][i] / (2 * h)
                add([(i, 0.5 * middle_bend[axis][i] - t), (i + 1, 0.5 * middle_bend[axis][i] + t)], limit)
            if along:
                add([(i, -0.5 / h), (i + 1, 0.5 / h)], along)
        for i in numpy.flatnonzero(step <= 0):
            add([(i, 1.0), (i + 1, -1.0)], 0.0)
        self.a = sparse.csr_matrix((values, (rows, columns)), shape=(len(bounds), n))
        self.b = numpy.array(bounds)

    def time(self, q):
        v = numpy.sqrt(q)
        return float(numpy.sum(2 * self.h / (v[self.cells] + v[self.cells + 1])))

    def excess(self, q):
        """Largest use of any cap or row beyond its limit, as a fraction."""
        over = numpy.max(q - self.cap) / numpy.max(self.cap)
        used = self.a @ q
        limited = self.b > 0
        over = max(over, float(numpy.max(used[limited] / self.b[limited] - 1.0)))
        if (~limited).any():
            over = max(over, float(numpy.max(used[~limited]) / numpy.max(self.cap)))
        return over

    def gradient(self, q):
        g = numpy.zeros_like(q)
        v = numpy.sqrt(q)
        both = v[self.cells] + v[self.cells + 1]
        for end in (self.cells, self.cells + 1):
            moving = v[end] > 0
            numpy.add.at(g, end[moving], -self.h[moving] / (both[moving] ** 2 * v[end][moving]))
        return g

    def improve(self, weights):
        """The feasible q that lowers `weights` . q most."""
        scale = numpy.max(numpy.abs(weights))
        answer = linprog(weights / scale, A_ub=self.a, b_ub=self.b, bounds=numpy.column_stack([0 * self.cap, self.cap]),
                         method="highs")
        if answer.status != 0:
            raise RuntimeError(answer.message)
        return numpy.clip(answer.x, 0.0, self.cap)

    def best(self, rounds=4):
        """The solver's own plan: starts from the largest sum of q, then follows the time's gradient."""
        q = self.improve(-numpy.ones_like(self.cap))
        for _ in range(rounds):
            other = self.improve(self.gradient(numpy.maximum(q, 1e-9 * self.cap.max())))
            parts = [(self.time((1 - w) * q + w * other), w) for w in numpy.linspace(0, 1, 21)]
            fastest, w = min(parts)
            if fastest >= self.time(q):
                break
            q = (1 - w) * q + w * other
        return q

    def lower_bound(self, q):
        """T is convex: T(y) >= T(q) + gradient . (y - q) for every feasible y, so the LP's least is a bound."""
        g = self.gradient(q)
        return self.time(q) + float(g @ (self.improve(g) - q))
