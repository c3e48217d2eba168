// The point list: rows sampled from a schedule, as CSV text.
// mm, s; feed in mm/min.
#pragma once

#include <functional>
#include <string>
#include <vector>

#include "core/base/result.h"
#include "core/base/run_control.h"
#include "core/schedule/schedule.h"

namespace kf::write {

enum class Sampling { chord, time, length };

// Geometry at arc length, as the planner's path gives it.
struct PathPoint {
  double x = 0.0, y = 0.0;
  double curvature = 0.0;
};

struct PointListContour {
  int number = 1;
  std::string name;
  bool closed = false;
  const schedule::Schedule* schedule = nullptr;
  std::function<PathPoint(double s)> at;  // called with rising s
  std::vector<double> corners;            // arc lengths that must be rows: tangent breaks
};

struct PointListHead {
  std::string source;  // drawing's file name
  std::string sourceSha256;
  std::string limits;                    // their name
  std::vector<std::string> limitValues;  // "path.feed_mm_per_min=9000", one a limit
  std::string law;                       // "acceleration": jerk limits were not used; or "jerk"
  std::string version;
  Sampling sampling = Sampling::time;
  double step = 0.001;
};

// The whole text. Rows: time, every step s of time and the end; length, every step mm and the end; chord, the
// longest strides whose chord leaves the path by no more than step, and no more than 1/50 of the path long;
// corners always.
//
// Fails     invalidArgument  step is not positive and finite, or asks for more than 50 million rows.
//           cancelled        by `control`.
// Accuracy  positions to 1e-10 mm as written (so that rows 0.1 ms apart can be differenced twice), times to
// 1e-10 s; t_s and s_mm rise strictly within a contour.
Result<std::string> pointListText(const PointListHead& head, const std::vector<PointListContour>& contours,
                                  RunControl& control);

}  // namespace kf::write
