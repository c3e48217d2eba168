// The formulas behind caps on speed: control, bend, and cut; internal to plan and its tests.
// mm, s, rad unless a name says otherwise.
#pragma once

namespace kf::plan {

// Speed at which the chord of one block period stays within `error` of an arc: (2 / T) sqrt(e (2 R - e)).
// Source  Yeh & Hsu 2002 (from memory); (v T / 2)^2 = R^2 - (R - e)^2. A circle smaller than the error is
// never
//         skipped: its chord is at most its diameter.
double chordSpeed(double radius, double error, double period);

// v^2 at which a first-order position loop (gain K) cuts a bend short by `error`: 2 e R K^2.
// The exact radius error of a circle, R (1 - 1 / sqrt(1 + (v / (R K))^2)), is smaller. Derived.
double servoLagQ(double curvature, double error, double positionGain);

// The same with a velocity loop of bandwidth Kv inside: r'' + Kv r' + Kv K r = Kv K w. On a circle at w = v /
// R its gain is A / sqrt((A - w^2)^2 + (Kv w)^2), A = K Kv; the radius error R |1 - gain| may be inward or
// outward. Exact; the smaller of the two speeds. Derived.
double servoLagQ(double curvature, double error, double positionGain, double velocityGain);

// v at which the jerk of steady motion, v^3 sqrt(k^4 + (dk/ds)^2), reaches `jerk`: (J / k^2)^(1/3) on a
// circle, (J A^2)^(1/3) where a clothoid of parameter A begins.
double bendJerkSpeed(double curvature, double slope, double jerk);

// How much faster the tool's centre may go when the feed is to hold at the wall: 1 / |1 + r kappa|, where
// kappa is the centre path's curvature, positive when it bends away from the wall's side (concave wall).
// Inside an arc of radius R this is (R - r) / R, outside (R + r) / R. At most 2: rolling around a sharp
// corner the wall stands still, which no tool should answer by racing (common practice).
double wallFeedFactor(double concaveCurvature, double toolRadius);

// Radial depth that would engage the tool as much on a straight wall: ae (1 + kappa (r - ae / 2)), equal to
// ae (2 R - ae) / (2 (R - r)) on concave and ae (2 R + ae) / (2 (R + r)) on convex walls of radius R. At most
// 2 r, not less than 0. Derived.
double effectiveRadialDepth(double radialDepth, double concaveCurvature, double toolRadius);

// Angle over which a tooth cuts: cos = 1 - 2 ae / D. Source: El-Hofy, Fundamentals of Machining Processes.
double engagementAngle(double radialDepth, double diameter);

// Largest chip thickness over feed per tooth: sin of the engagement angle, 1 from ae >= D / 2. Same source.
double chipThicknessRatio(double radialDepth, double diameter);

// Spindle speed in 1/min for a cutting speed in m/min and a diameter in mm: 1000 vc / (pi D).
double spindleSpeed(double cuttingSpeedMPerMin, double diameter);

}  // namespace kf::plan
