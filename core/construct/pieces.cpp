// Stretches of curves small enough to be nearly straight, their distance to points and their crossings.
// Lengths in mm.
#include "core/construct/pieces.h"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "core/construct/deviation.h"

namespace kf::construct {
namespace {

using curve::Arc;
using curve::Curve;
using curve::Jet;
using curve::Line;
using curve::Vec2;

using Found = std::vector<std::pair<double, double>>;
constexpr double kEndSlack = 1e-9;

void push(Found& found, double u, double v) {
  if (u < -kEndSlack || u > 1.0 + kEndSlack || v < -kEndSlack || v > 1.0 + kEndSlack) return;
  found.emplace_back(std::clamp(u, 0.0, 1.0), std::clamp(v, 0.0, 1.0));
}

// Parameter on the arc of a point on its circle; values just outside the ends stay close to them.
double arcParameter(const Arc& arc, Vec2 p) {
  const Vec2 r = p - arc.centre;
  double turned = (std::atan2(r.y, r.x) - arc.start) * (arc.sweep < 0.0 ? -1.0 : 1.0);
  constexpr double kTurn = 2.0 * std::numbers::pi;
  turned -= kTurn * std::floor(turned / kTurn);
  const double sweep = std::abs(arc.sweep);
  if (turned > sweep && turned - sweep > kTurn - turned) turned -= kTurn;
  return turned / sweep;
}

void lineLine(const Line& a, const Line& b, Found& found) {
  const Vec2 da = a.b - a.a, db = b.b - b.a;
  const double det = curve::cross(da, db);
  if (std::abs(det) <= 1e-14 * curve::norm(da) * curve::norm(db)) return;
  const Vec2 r = b.a - a.a;
  push(found, curve::cross(r, db) / det, curve::cross(r, da) / det);
}

// A nearly tangent pair counts as touching once when it misses by rounding only.
double rootOrTouch(double square, double scale) {
  return square > 0.0 ? std::sqrt(square) : square > -1e-13 * scale ? 0.0 : -1.0;
}

void lineArc(const Line& line, const Arc& arc, Found& found, bool swapped) {
  const Vec2 d = line.b - line.a;
  const double length = curve::norm(d);
  const Vec2 t = d / length, r = arc.centre - line.a;
  const double along = curve::dot(r, t), beside = curve::cross(t, r);
  const double half = rootOrTouch(arc.radius * arc.radius - beside * beside, arc.radius * arc.radius);
  if (half < 0.0) return;
  for (int side = half > 0.0 ? -1 : 1; side <= 1; side += 2) {
    const double u = (along + side * half) / length;
    const double v = arcParameter(arc, line.a + (u * length) * t);
    swapped ? push(found, v, u) : push(found, u, v);
  }
}

void arcArc(const Arc& a, const Arc& b, Found& found) {
  const Vec2 between = b.centre - a.centre;
  const double d = curve::norm(between);
  if (!(d > 1e-12 * (a.radius + b.radius))) return;
  const Vec2 t = between / d;
  const double along = 0.5 * (d + (a.radius - b.radius) * (a.radius + b.radius) / d);
  const double half = rootOrTouch(a.radius * a.radius - along * along, a.radius * a.radius);
  if (half < 0.0) return;
  for (int side = half > 0.0 ? -1 : 1; side <= 1; side += 2) {
    const Vec2 p = a.centre + along * t + (side * half) * curve::leftOf(t);
    push(found, arcParameter(a, p), arcParameter(b, p));
  }
}

// A stretch during the search, with its ends evaluated.
struct Stretch {
  double from, to;
  Vec2 a, b;
  double height;
  curve::Box box() const {
    curve::Box box;
    box.include(a);
    box.include(b);
    box.low = box.low - Vec2{height, height};
    box.high = box.high + Vec2{height, height};
    return box;
  }
};

class CurveCrossings {
 public:
  CurveCrossings(const Curve& a, const Curve& b, Found& found) : a_(a), b_(b), found_(found) {}

  void search(const Stretch& s, const Stretch& t, int depth) {
    const curve::Box left = s.box(), right = t.box();
    if (left.low.x > right.high.x || right.low.x > left.high.x || left.low.y > right.high.y ||
        right.low.y > left.high.y || budget_-- <= 0)
      return;
    const double chordS = curve::distance(s.a, s.b), chordT = curve::distance(t.a, t.b);
    const bool straight = s.height <= 1e-4 * chordS && t.height <= 1e-4 * chordT;
    if (straight || depth >= 24) {
      polish(s, t);
      return;
    }
    const bool cutS = s.height / std::max(chordS, 1e-300) >= t.height / std::max(chordT, 1e-300);
    const Stretch& cut = cutS ? s : t;
    const double middle = 0.5 * (cut.from + cut.to);
    const Vec2 p = (cutS ? a_ : b_).point(middle);
    const Stretch first = half(cut, cutS ? a_ : b_, cut.from, cut.a, middle, p),
                  second = half(cut, cutS ? a_ : b_, middle, p, cut.to, cut.b);
    for (const Stretch& part : {first, second})
      cutS ? search(part, t, depth + 1) : search(s, part, depth + 1);
  }

 private:
  // Half of a stretch. It lies within the height of the whole; three samples usually show that it is much
  // straighter (four times for even speed, twice beside a cusp).
  static Stretch half(const Stretch& whole, const Curve& c, double from, Vec2 a, double to, Vec2 b) {
    double seen = 0.0;
    for (double part : {0.25, 0.5, 0.75})
      seen = std::max(seen, distanceToChord(c.point(from + part * (to - from)), a, b));
    return {from, to, a, b, std::min(0.6 * whole.height, 1.6 * seen + 1e-3 * whole.height)};
  }

  // Newton on a(u) = b(v) from the crossing of the chords.
  void polish(const Stretch& s, const Stretch& t) {
    const Vec2 ds = s.b - s.a, dt = t.b - t.a, r = t.a - s.a;
    const double det = curve::cross(ds, dt);
    double x = 0.5, y = 0.5;
    if (std::abs(det) > 1e-12 * curve::norm(ds) * curve::norm(dt)) {
      x = std::clamp(curve::cross(r, dt) / det, 0.0, 1.0);
      y = std::clamp(curve::cross(r, ds) / det, 0.0, 1.0);
    }
    double u = s.from + x * (s.to - s.from), v = t.from + y * (t.to - t.from);
    const double slackU = 0.05 * (s.to - s.from), slackV = 0.05 * (t.to - t.from);
    for (int step = 0; step < 30; ++step) {
      const Jet ja = a_.jet(u), jb = b_.jet(v);
      const Vec2 gap = jb.p - ja.p;
      const double d = curve::cross(ja.d1, jb.d1);
      if (std::abs(d) <= 1e-14 * curve::norm(ja.d1) * curve::norm(jb.d1)) return;
      const double du = curve::cross(gap, jb.d1) / d, dv = curve::cross(gap, ja.d1) / d;
      // Near a cusp the speed falls to nothing and full steps overshoot: stay in the stretch.
      u = std::clamp(u + du, s.from - slackU, s.to + slackU);
      v = std::clamp(v + dv, t.from - slackV, t.to + slackV);
      if (std::abs(du) <= 1e-14 * (1.0 + std::abs(u)) && std::abs(dv) <= 1e-14 * (1.0 + std::abs(v))) break;
    }
    u = std::clamp(u, a_.first(), a_.last());
    v = std::clamp(v, b_.first(), b_.last());
    if (curve::distance(a_.point(u), b_.point(v)) > 1e-9 * (1.0 + curve::norm(s.a))) return;
    for (const auto& [otherU, otherV] : found_) {
      if (std::abs(otherU - u) <= 1e-9 * (a_.last() - a_.first()) &&
          std::abs(otherV - v) <= 1e-9 * (b_.last() - b_.first()))
        return;
    }
    found_.emplace_back(u, v);
  }

  const Curve& a_;
  const Curve& b_;
  Found& found_;
  int budget_ = 4000;
};

Stretch stretchOf(const Piece& p) {
  return {p.from, p.to, p.curve->point(p.from), p.curve->point(p.to), p.height};
}

// Arcs that span much are cut so that the search starts from nearly straight stretches.
std::vector<Stretch> stretchesOf(const Piece& p) {
  const Arc* arc = p.curve->asArc();
  const int parts = arc != nullptr ? 1 + static_cast<int>(std::abs(arc->sweep) / 0.4) : 1;
  if (parts == 1) return {stretchOf(p)};
  std::vector<Stretch> list;
  for (int i = 0; i < parts; ++i) {
    const double a = static_cast<double>(i) / parts, b = static_cast<double>(i + 1) / parts;
    list.push_back({a, b, p.curve->point(a), p.curve->point(b), chordHeight({p.curve, a, b})});
  }
  return list;
}

double distanceToArc(const Arc& arc, Vec2 p) {
  const double v = arcParameter(arc, p);
  if (v >= 0.0 && v <= 1.0) return std::abs(curve::distance(p, arc.centre) - arc.radius);
  const auto end = [&arc](double angle) {
    return arc.centre + arc.radius * Vec2{std::cos(angle), std::sin(angle)};
  };
  return std::min(curve::distance(p, end(arc.start)), curve::distance(p, end(arc.start + arc.sweep)));
}

void addCurvedPieces(const Curve& c, std::uint32_t owner, double from, double to, int depth,
                     std::vector<Piece>& pieces) {
  const Vec2 a = c.point(from), b = c.point(to);
  const double height = chordHeight({&c, from, to});
  if (depth < 12 && height > 0.01 * curve::distance(a, b)) {
    const double middle = 0.5 * (from + to);
    addCurvedPieces(c, owner, from, middle, depth + 1, pieces);
    addCurvedPieces(c, owner, middle, to, depth + 1, pieces);
    return;
  }
  Piece piece{&c, owner, from, to, height, {}};
  piece.box = Stretch{from, to, a, b, height}.box();
  pieces.push_back(piece);
}

}  // namespace

void addPieces(const Curve& c, std::uint32_t owner, std::vector<Piece>& pieces) {
  if (c.asLine() != nullptr || c.asArc() != nullptr) {
    pieces.push_back({&c, owner, 0.0, 1.0, chordHeight({&c, 0.0, 1.0}), c.bounds()});
    return;
  }
  double from = c.first();
  std::vector<double> cuts = c.breaks();
  cuts.push_back(c.last());
  for (double to : cuts) {
    addCurvedPieces(c, owner, from, to, 0, pieces);
    from = to;
  }
}

double distanceTo(const Piece& piece, Vec2 p, double enough) {
  if (const Line* line = piece.curve->asLine()) return distanceToChord(p, line->a, line->b);
  if (const Arc* arc = piece.curve->asArc()) return distanceToArc(*arc, p);
  const Vec2 a = piece.curve->point(piece.from), b = piece.curve->point(piece.to);
  const double rough = distanceToChord(p, a, b);
  if (rough - piece.height > enough) return rough - piece.height;
  double best = std::min(curve::distance(p, a), curve::distance(p, b));
  const Vec2 d = b - a;
  const double square = curve::dot(d, d);
  const double t = square > 0.0 ? std::clamp(curve::dot(p - a, d) / square, 0.0, 1.0) : 0.5;
  // Newton on (c - p) . c' = 0, bracketed where it changes sign over the piece: at a centre of curvature the
  // distance is so flat that plain steps would stop early.
  double low = piece.from, high = piece.to, u = low + t * (high - low);
  const auto slopeAt = [&](double at, Jet& j) {
    j = piece.curve->jet(at);
    best = std::min(best, curve::distance(j.p, p));
    return curve::dot(j.p - p, j.d1);
  };
  for (int step = 0; step < 60; ++step) {
    Jet j;
    const double g = slopeAt(u, j);
    (g > 0.0 ? high : low) = u;
    if (high - low <= 1e-12 * (piece.to - piece.from)) break;
    const double bent = curve::dot(j.d1, j.d1) + curve::dot(j.p - p, j.d2);
    double next = bent > 0.0 ? u - g / bent : low - 1.0;
    if (!(next > low && next < high)) next = 0.5 * (low + high);
    if (std::abs(next - u) <= 1e-13 * (piece.to - piece.from)) break;
    u = next;
  }
  return best;
}

void crossings(const Piece& a, const Piece& b, Found& found) {
  const Line *lineA = a.curve->asLine(), *lineB = b.curve->asLine();
  const Arc *arcA = a.curve->asArc(), *arcB = b.curve->asArc();
  if (lineA != nullptr && lineB != nullptr) return lineLine(*lineA, *lineB, found);
  if (lineA != nullptr && arcB != nullptr) return lineArc(*lineA, *arcB, found, false);
  if (arcA != nullptr && lineB != nullptr) return lineArc(*lineB, *arcA, found, true);
  if (arcA != nullptr && arcB != nullptr) return arcArc(*arcA, *arcB, found);
  CurveCrossings search(*a.curve, *b.curve, found);
  for (const Stretch& s : stretchesOf(a)) {
    for (const Stretch& t : stretchesOf(b)) search.search(s, t, 0);
  }
}

}  // namespace kf::construct
