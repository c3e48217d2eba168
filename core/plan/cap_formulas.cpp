// The formulas behind caps on speed: control, bend, and cut.
// mm, s, rad unless a name says otherwise.
#include "core/plan/cap_formulas.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace kf::plan {

double chordSpeed(double radius, double error, double period) {
  if (radius <= error) return 2.0 * radius / period;
  return 2.0 / period * std::sqrt(error * (2.0 * radius - error));
}

double servoLagQ(double curvature, double error, double positionGain) {
  return 2.0 * error * positionGain * positionGain / curvature;
}

// With x = w^2 and the gain g at the limit: (A - x)^2 + Kv^2 x = A^2 / g^2, that is
// x^2 + (Kv^2 - 2 A) x + A^2 (1 - 1 / g^2) = 0. For g < 1 one root is positive; for g > 1 both are, or none.
double servoLagQ(double curvature, double error, double positionGain, double velocityGain) {
  const double radius = 1.0 / curvature, a = positionGain * velocityGain;
  const double b = velocityGain * velocityGain - 2.0 * a;
  double lowest = HUGE_VAL;
  const double inward = 1.0 - error / radius, outward = 1.0 + error / radius;
  if (inward > 0.0) {
    const double c = a * a * (1.0 - 1.0 / (inward * inward));  // negative
    const double root = std::sqrt(b * b - 4.0 * c);
    // The form without cancellation.
    lowest = b > 0.0 ? -2.0 * c / (b + root) : 0.5 * (root - b);
  }
  const double c = a * a * (1.0 - 1.0 / (outward * outward));  // positive
  if (b < 0.0 && b * b >= 4.0 * c) lowest = std::min(lowest, 2.0 * c / (-b + std::sqrt(b * b - 4.0 * c)));
  return lowest * radius * radius;
}

double bendJerkSpeed(double curvature, double slope, double jerk) {
  const double rate = std::hypot(curvature * curvature, slope);
  return rate > 0.0 ? std::cbrt(jerk / rate) : HUGE_VAL;
}

double wallFeedFactor(double concaveCurvature, double toolRadius) {
  const double wall = std::abs(1.0 + toolRadius * concaveCurvature);
  return 1.0 / std::max(wall, 0.5);
}

double effectiveRadialDepth(double radialDepth, double concaveCurvature, double toolRadius) {
  const double depth = radialDepth * (1.0 + concaveCurvature * (toolRadius - 0.5 * radialDepth));
  return std::clamp(depth, 0.0, 2.0 * toolRadius);
}

double engagementAngle(double radialDepth, double diameter) {
  return std::acos(std::clamp(1.0 - 2.0 * radialDepth / diameter, -1.0, 1.0));
}

double chipThicknessRatio(double radialDepth, double diameter) {
  return radialDepth >= 0.5 * diameter ? 1.0 : std::sin(engagementAngle(radialDepth, diameter));
}

double spindleSpeed(double cuttingSpeedMPerMin, double diameter) {
  return 1000.0 * cuttingSpeedMPerMin / (std::numbers::pi * diameter);
}

}  // namespace kf::plan
