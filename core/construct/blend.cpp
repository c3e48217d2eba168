// Joints that can be driven at speed: tangent breaks and curvature steps replaced by short curves within a
// tolerance. Lengths in mm, angles in rad.
#include "core/construct/blend.h"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "core/construct/corner_curve.h"
#include "core/construct/shares.h"
#include "core/curve/arc_length.h"

namespace kf::construct {
namespace {

using contour::Contour;
using contour::JointKind;

Error invalid(std::string message) {
  return {ErrorCode::invalidArgument, std::move(message)};
}

bool isPositive(double value) {
  return std::isfinite(value) && value > 0.0;
}

// What is to be done at one joint, and the blend once it is made.
struct Task {
  bool wanted = false;
  double tolerance = 0.0;
  JointPlace place;
  std::optional<CornerCurve> corner;
};

class Blender {
 public:
  Blender(const Contour& whole, const BlendOptions& options) : whole_(whole), options_(options) {}

  Result<BlendReport> run(RunControl& control) {
    if (auto measured = measure(); !measured) return measured.error();
    if (auto chosen = choose(); !chosen) return chosen.error();
    std::vector<double> wanted(tasks_.size(), 0.0);
    for (std::size_t j = 0; j < tasks_.size(); ++j) {
      if (control.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
      Task& task = tasks_[j];
      if (!task.wanted) continue;
      task.corner = largestCorner(task.place, task.tolerance, HUGE_VAL);
      if (task.corner) wanted[j] = task.corner->trim;
    }
    shrink(wanted);
    control.report(1.0);
    return assemble();
  }

 private:
  Result<void> measure() {
    for (const contour::Segment& segment : whole_.segments) {
      const double length = curve::totalLength(segment.curve);
      if (!isPositive(length)) {
        return invalid(fmt::format("{}{} has no length; mend the contour first", whole_.name,
                                   segment.source.empty() ? ": a segment" : ": " + segment.source));
      }
      lengths_.push_back(length);
    }
    return {};
  }

  Result<void> choose() {
    report_.driven.name = whole_.name;
    const auto joints = contour::findJoints(whole_, options_.joints);
    const std::size_t n = whole_.segments.size();
    tasks_.resize(n);
    for (const contour::Joint& joint : joints) {
      JointReport made;
      made.joint = joint;
      Task& task = tasks_[joint.before];
      const std::size_t next = (joint.before + 1) % n;
      task.place = {&whole_.segments[joint.before].curve,
                    &whole_.segments[next].curve,
                    lengths_[joint.before],
                    lengths_[next],
                    joint.turn,
                    joint.kind == JointKind::tangentBreak};
      task.tolerance = options_.tolerance;
      const bool closing = joint.before + 1 == n;
      if (joint.kind != JointKind::smooth) {
        made.treatment = Treatment::stopped;
        task.wanted = std::abs(joint.turn) <= options_.largestTurn && (!closing || options_.closingJoint);
      }
      report_.joints.push_back(made);
    }
    return applyChoices();
  }

  Result<void> applyChoices() {
    for (const JointChoice& choice : options_.byHand) {
      const auto at =
          std::find_if(report_.joints.begin(), report_.joints.end(),
                       [&choice](const JointReport& r) { return r.joint.before == choice.before; });
      if (at == report_.joints.end()) {
        return invalid(fmt::format("{} has no joint {}; it has {}", whole_.name, choice.before + 1,
                                   report_.joints.size()));
      }
      if (choice.tolerance && !isPositive(*choice.tolerance)) {
        return invalid(fmt::format("the tolerance of joint {} must be a positive number, not {}",
                                   choice.before + 1, *choice.tolerance));
      }
      if (at->joint.kind == JointKind::smooth) continue;
      Task& task = tasks_[choice.before];
      task.wanted = choice.blend && std::abs(at->joint.turn) <= options_.largestTurn;
      if (choice.tolerance) task.tolerance = *choice.tolerance;
    }
    return {};
  }

  // Blends that their neighbours have no room for are made again at their fair share.
  void shrink(const std::vector<double>& wanted) {
    const std::vector<double> shares = fairShares(lengths_, wanted, whole_.closed);
    for (JointReport& made : report_.joints) {
      Task& task = tasks_[made.joint.before];
      if (!task.corner) continue;
      const double share = shares[made.joint.before];
      if (share >= task.corner->trim) continue;
      made.crowded = true;
      task.corner = largestCorner(task.place, task.tolerance, share);
    }
  }

  BlendReport assemble() {
    Contour& driven = report_.driven;
    driven.layer = whole_.layer;
    driven.closed = whole_.closed;
    const std::size_t n = whole_.segments.size();
    std::vector<JointReport*> reports(n, nullptr);
    for (JointReport& made : report_.joints) reports[made.joint.before] = &made;
    for (std::size_t i = 0; i < n; ++i) {
      addRemainder(i);
      if (reports[i] != nullptr) addBlend(*reports[i]);
    }
    return std::move(report_);
  }

  // What the two blends at its ends leave of segment i.
  void addRemainder(std::size_t i) {
    const contour::Segment& segment = whole_.segments[i];
    const std::size_t n = whole_.segments.size();
    double from = segment.curve.first(), to = segment.curve.last(), used = 0.0;
    const bool hasBefore = i > 0 || whole_.closed;
    const auto& before = tasks_[i > 0 ? i - 1 : n - 1].corner;
    if (hasBefore && before) {
      from = before->cutAfter;
      used += before->trim;
    }
    if (const auto& after = tasks_[i].corner) {
      to = after->cutBefore;
      used += after->trim;
    }
    if (used == 0.0) {
      report_.driven.segments.push_back(segment);
    } else if (to > from && lengths_[i] - used > 1e-10 * lengths_[i]) {
      report_.driven.segments.push_back({segment.curve.trimmed(from, to), segment.source});
    }
  }

  void addBlend(JointReport& made) {
    if (made.treatment == Treatment::smooth) return;
    const auto& corner = tasks_[made.joint.before].corner;
    if (!corner) {
      ++report_.stopped;
      return;
    }
    made.treatment = Treatment::blended;
    made.deviation = corner->deviation;
    made.trim = corner->trim;
    made.largestCurvature = corner->largestCurvature;
    made.segment = report_.driven.segments.size();
    curve::Curve blend = bezierCurve(corner->poles);
    made.length = curve::totalLength(blend);
    report_.driven.segments.push_back({std::move(blend), std::string(contour::kBlendSource)});
    report_.largestDeviation = std::max(report_.largestDeviation, made.deviation);
    ++report_.blended;
    if (made.crowded) ++report_.crowded;
  }

  const Contour& whole_;
  const BlendOptions& options_;
  std::vector<double> lengths_;
  std::vector<Task> tasks_;  // one a segment: the joint after it
  BlendReport report_;
};

}  // namespace

Result<void> BlendOptions::validate() const {
  if (!isPositive(tolerance))
    return invalid(fmt::format("the path tolerance must be a positive number of mm, not {}", tolerance));
  if (!(largestTurn >= 0.0) || largestTurn > 3.12) {
    return invalid(fmt::format("the largest turn to blend must be 0 to 3.12 rad, not {}", largestTurn));
  }
  return {};
}

Result<BlendReport> blendJoints(const Contour& contour, const BlendOptions& options, RunControl& control) {
  if (auto valid = options.validate(); !valid) return valid.error();
  if (contour.segments.empty())
    return invalid("the contour " + contour.name + " is empty; choose another one");
  const Contour whole = contour::splitAtKnots(contour);
  return Blender(whole, options).run(control);
}

}  // namespace kf::construct
