// Growth of blending, offsetting and fitting with the number of segments, and the time of a tool change.
// Run in one go: compare the times of each name at 1e3, 1e4 and 1e5 segments.
#include <benchmark/benchmark.h>

#include <cmath>
#include <numbers>
#include <random>

#include "core/construct/blend.h"
#include "core/construct/fit.h"
#include "core/construct/offset.h"

namespace {

using namespace kf;

// A closed wavy outline traced in n short lines with 1 um of noise, about 0.35 mm long each.
contour::Contour traced(int n) {
  std::mt19937 random(1);
  std::normal_distribution<double> noise(0.0, 0.001);
  contour::Contour c;
  c.name = "traced";
  c.closed = true;
  const double size = 0.35 * n / (2.0 * std::numbers::pi);
  std::vector<curve::Vec2> points;
  for (int i = 0; i < n; ++i) {
    const double t = 2.0 * std::numbers::pi * i / n;
    // Waves of about 100 mm, so that the same features repeat as the outline grows.
    const double r = size + 4.0 * std::cos(std::round(0.06 * size) * t);
    points.push_back({r * std::cos(t) + noise(random), r * std::sin(t) + noise(random)});
  }
  for (int i = 0; i < n; ++i)
    c.segments.push_back(
        {curve::Line{points[static_cast<std::size_t>(i)], points[static_cast<std::size_t>((i + 1) % n)]},
         ""});
  return c;
}

void blendJoints(benchmark::State& state) {
  const contour::Contour c = traced(static_cast<int>(state.range(0)));
  construct::BlendOptions options;
  for (auto _ : state) {
    RunControl control;
    auto made = construct::blendJoints(c, options, control);
    if (!made.ok()) state.SkipWithError(made.error().message.c_str());
    benchmark::DoNotOptimize(made);
  }
  state.SetComplexityN(state.range(0));
}

void offsetTool(benchmark::State& state) {
  const contour::Contour c = traced(static_cast<int>(state.range(0)));
  construct::OffsetOptions options;
  options.radius = 3.0;
  options.side = state.range(1) == 0 ? construct::ToolSide::left : construct::ToolSide::right;
  for (auto _ : state) {
    RunControl control;
    auto made = construct::offsetContours({c}, options, control);
    if (!made.ok()) state.SkipWithError(made.error().message.c_str());
    benchmark::DoNotOptimize(made);
  }
  state.SetComplexityN(state.range(0));
}

void fitRuns(benchmark::State& state) {
  const contour::Contour c = traced(static_cast<int>(state.range(0)));
  construct::FitOptions options;
  options.tolerance = 0.01;
  for (auto _ : state) {
    RunControl control;
    auto made = construct::fitRuns(c, options, control);
    if (!made.ok()) state.SkipWithError(made.error().message.c_str());
    benchmark::DoNotOptimize(made);
  }
  state.SetComplexityN(state.range(0));
}

BENCHMARK(blendJoints)->RangeMultiplier(10)->Range(1000, 100000)->Unit(benchmark::kMillisecond)->Complexity();
BENCHMARK(offsetTool)->ArgsProduct({{1000, 5000, 10000, 100000}, {0, 1}})->Unit(benchmark::kMillisecond);
BENCHMARK(fitRuns)->RangeMultiplier(10)->Range(1000, 100000)->Unit(benchmark::kMillisecond)->Complexity();

}  // namespace
