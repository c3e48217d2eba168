// Time that a job spends beside its contours: rapid moves, plunging, piercing.
// mm, s.
#pragma once

#include "core/limits/limits.h"

namespace kf::plan {

// Time from rest to rest along a straight rapid move by (dx, dy), at limits.rapidSpeed and rapidAcceleration
// or, where they are missing, at what the axes allow in that direction. Domain  finite; 0 for no move;
// infinite when nothing limits or allows it.
double rapidTime(double dx, double dy, const limits::Limits& limits);

// Time to enter the material at one contour: plunge by limits.plungeDepth at limits.plungeFeed, and
// limits.pierceTime. Withdrawing goes at the plunge feed too unless limits.retractSpeed is given.
double entryTime(const limits::Limits& limits);

// Time of a straight move of length h from rest to rest under a speed and an acceleration limit: h / v + v /
// a, or 2 sqrt(h / a) when v is not reached.
double trapezoidTime(double h, double v, double a);

}  // namespace kf::plan
