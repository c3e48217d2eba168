// The part of raw offset pieces that keeps its distance, in order, chained into paths.
// Lengths in mm.
#include "core/construct/trim.h"

#include <algorithm>
#include <cmath>
#include <unordered_map>

namespace kf::construct {
namespace {

using curve::Vec2;

constexpr double kSliver = 1e-7;   // mm; shorter stretches are dropped
constexpr double kMeeting = 1e-6;  // mm; ends this close meet
constexpr std::uint32_t kNone = 0xffffffffu;

class Trimmer {
 public:
  Trimmer(const RawOffset& raw, const Clearance& contours, double radius)
      : raw_(raw), contours_(contours), limit_(radius - closenessSlack(raw, radius)) {}

  Result<Trimmed> run(RunControl& control) {
    findCrossings();
    if (control.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
    control.report(0.5);
    cut();
    if (control.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
    chain();
    control.report(1.0);
    return std::move(out_);
  }

 private:
  // A short piece whose middle is far too close lies too close as a whole.
  bool isHopeless(const curve::Curve& c) const {
    const curve::Box box = c.bounds();
    const double size = std::hypot(box.width(), box.height());
    if (size >= limit_) return false;
    return !contours_.isClear(c.point(0.5 * (c.first() + c.last())), limit_ - size);
  }

  void findCrossings() {
    cuts_.resize(raw_.pieces.size());
    hopeless_.assign(raw_.pieces.size(), 0);
    std::vector<Piece> pieces;
    for (std::uint32_t i = 0; i < raw_.pieces.size(); ++i) {
      const curve::Curve& c = raw_.pieces[i].curve;
      hopeless_[i] = isHopeless(c) ? 1 : 0;
      if (hopeless_[i] == 0) addPieces(c, i, pieces);
    }
    std::vector<curve::Box> boxes;
    boxes.reserve(pieces.size());
    for (Piece& piece : pieces) {
      // Pieces that only touch must meet in spite of rounding.
      piece.box.low = piece.box.low - Vec2{1e-9, 1e-9};
      piece.box.high = piece.box.high + Vec2{1e-9, 1e-9};
      boxes.push_back(piece.box);
    }
    const BoxTree tree(boxes);
    std::vector<std::pair<double, double>> found;
    for (std::size_t i = 0; i < pieces.size(); ++i) {
      tree.visit(pieces[i].box, [&](std::size_t j) {
        if (j <= i) return true;
        const Piece &a = pieces[i], &b = pieces[j];
        if (a.owner == b.owner && (a.to == b.from || b.to == a.from)) return true;
        found.clear();
        crossings(a, b, found);
        for (const auto& [u, v] : found) {
          cuts_[a.owner].push_back(u);
          cuts_[b.owner].push_back(v);
        }
        return true;
      });
    }
  }

  void cut() {
    for (std::uint32_t i = 0; i < raw_.pieces.size(); ++i) {
      const curve::Curve& c = raw_.pieces[i].curve;
      std::vector<double>& cuts = cuts_[i];
      std::sort(cuts.begin(), cuts.end());
      cuts.push_back(c.last());
      double from = c.first();
      Vec2 start = c.startPoint();
      for (double to : cuts) {
        if (!(to > from)) continue;
        const Vec2 end = c.point(to);
        SubPiece sub{i, from, to, start, end, false};
        const Vec2 middle = c.point(0.5 * (from + to));
        const bool sliver = curve::distance(start, end) < kSliver && curve::distance(start, middle) < kSliver;
        // A sliver joins what follows instead of tearing the chain.
        if (sliver && to != c.last()) continue;
        sub.kept = !sliver && hopeless_[i] == 0 && contours_.isClear(middle, limit_);
        out_.subPieces.push_back(sub);
        from = to;
        start = end;
      }
    }
  }

  static std::uint64_t cellOf(Vec2 p, int dx, int dy) {
    constexpr double kCell = 4.0 * kMeeting;
    const auto x = static_cast<std::int64_t>(std::floor(p.x / kCell)) + dx,
               y = static_cast<std::int64_t>(std::floor(p.y / kCell)) + dy;
    return static_cast<std::uint64_t>(x) * 0x9E3779B97F4A7C15ull ^
           (static_cast<std::uint64_t>(y) * 0xC2B2AE3D27D4EB4Full);
  }

  // Unused kept stretches that begin at p. Where several do, one of another raw piece comes first: at an
  // inner corner the continuation of the same piece is a spur within rounding of the limit.
  std::uint32_t nextAt(Vec2 p, std::uint32_t piece) const {
    std::uint32_t best = kNone;
    bool bestSwitches = false;
    for (int dx = -1; dx <= 1; ++dx) {
      for (int dy = -1; dy <= 1; ++dy) {
        const auto range = starts_.equal_range(cellOf(p, dx, dy));
        for (auto it = range.first; it != range.second; ++it) {
          const std::uint32_t i = it->second;
          if (used_[i] != 0 || curve::distance(out_.subPieces[i].start, p) > kMeeting) continue;
          const bool switches = out_.subPieces[i].piece != piece;
          if (best == kNone || (switches && !bestSwitches) || (switches == bestSwitches && i < best)) {
            best = i;
            bestSwitches = switches;
          }
        }
      }
    }
    return best;
  }

  void walkFrom(std::uint32_t first) {
    Chain chain;
    const Vec2 begin = out_.subPieces[first].start;
    std::uint32_t at = first;
    double travelled = 0.0;  // along chords through the middles
    while (true) {
      used_[at] = 1;
      chain.subPieces.push_back(at);
      const SubPiece& sub = out_.subPieces[at];
      const Vec2 middle = raw_.pieces[sub.piece].curve.point(0.5 * (sub.from + sub.to));
      travelled += curve::distance(sub.start, middle) + curve::distance(middle, sub.end);
      if (travelled > 10.0 * kMeeting && curve::distance(sub.end, begin) <= kMeeting) {
        chain.closed = true;
        break;
      }
      at = nextAt(sub.end, sub.piece);
      if (at == kNone) break;
    }
    out_.chains.push_back(std::move(chain));
  }

  void chain() {
    const auto count = static_cast<std::uint32_t>(out_.subPieces.size());
    used_.assign(count, 0);
    std::unordered_multimap<std::uint64_t, std::uint32_t> ends;
    for (std::uint32_t i = 0; i < count; ++i) {
      if (!out_.subPieces[i].kept) continue;
      starts_.emplace(cellOf(out_.subPieces[i].start, 0, 0), i);
      ends.emplace(cellOf(out_.subPieces[i].end, 0, 0), i);
    }
    const auto follows = [&](std::uint32_t i) {
      const Vec2 p = out_.subPieces[i].start;
      for (int dx = -1; dx <= 1; ++dx) {
        for (int dy = -1; dy <= 1; ++dy) {
          const auto range = ends.equal_range(cellOf(p, dx, dy));
          for (auto it = range.first; it != range.second; ++it) {
            if (curve::distance(out_.subPieces[it->second].end, p) <= kMeeting) return true;
          }
        }
      }
      return false;
    };
    for (std::uint32_t i = 0; i < count; ++i) {
      if (out_.subPieces[i].kept && used_[i] == 0 && !follows(i)) walkFrom(i);
    }
    for (std::uint32_t i = 0; i < count; ++i) {
      if (out_.subPieces[i].kept && used_[i] == 0) walkFrom(i);
    }
  }

  const RawOffset& raw_;
  const Clearance& contours_;
  double limit_;
  std::vector<std::vector<double>> cuts_;
  std::vector<char> hopeless_;
  std::vector<char> used_;
  std::unordered_multimap<std::uint64_t, std::uint32_t> starts_;
  Trimmed out_;
};

}  // namespace

double closenessSlack(const RawOffset& raw, double radius) {
  return std::max(1e-10 * radius, 2.0 * raw.error) + 1e-10;
}

Result<Trimmed> trim(const RawOffset& raw, const Clearance& contours, double radius, RunControl& control) {
  return Trimmer(raw, contours, radius).run(control);
}

}  // namespace kf::construct
