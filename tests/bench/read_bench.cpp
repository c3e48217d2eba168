// Reading a 50 MB DXF of 200,000 entities against counting its lines and parsing its numbers; 1e6 CSV rows;
// chaining 1e4 to 1e6 lines.
// Times as Google Benchmark shows them; only ratios within one run mean anything.
#include <algorithm>
#include <charconv>
#include <cmath>
#include <numbers>
#include <random>

#include <benchmark/benchmark.h>
#include <fmt/format.h>

#include "core/contour/chain.h"
#include "core/read/drawing.h"

namespace kf {
namespace {

constexpr int kEntities = 200'000;

// Lines, arcs, circles and polylines with bulges, with handles and subclass marks as writers leave them.
std::string largeDxf() {
  std::mt19937_64 random(1);
  std::uniform_real_distribution<double> at(-1000.0, 1000.0);
  std::string text = "  0\nSECTION\n  2\nENTITIES\n";
  const auto add = [&](int code, double value) { text += fmt::format("{:3}\n{:.10f}\n", code, value); };
  for (int i = 0; i < kEntities; ++i) {
    const char* kinds[] = {"LINE", "ARC", "LWPOLYLINE", "CIRCLE"};
    const int kind = i % 4;
    text += fmt::format("  0\n{}\n  5\n{:X}\n330\n17\n100\nAcDbEntity\n  8\nlayer {}\n100\nAcDbCurve\n",
                        kinds[kind], i + 256, i % 7);
    if (kind == 2) {
      text += " 90\n9\n 70\n0\n";
      for (int j = 0; j < 9; ++j) {
        add(10, at(random));
        add(20, at(random));
        add(42, j % 3 == 0 ? 0.25 : 0.0);
      }
      continue;
    }
    add(10, at(random));
    add(20, at(random));
    add(30, 0.0);
    if (kind == 0) {
      add(11, at(random));
      add(21, at(random));
      add(31, 0.0);
      continue;
    }
    add(40, 1.0 + std::abs(at(random)));
    if (kind == 1) {
      add(50, 10.0);
      add(51, 80.0);
    }
  }
  return text + "  0\nENDSEC\n  0\nEOF\n";
}

const std::string& theDxf() {
  static const std::string text = largeDxf();
  return text;
}

void countLinesAndParseNumbers(benchmark::State& state) {
  const std::string& text = theDxf();
  for (auto _ : state) {
    benchmark::DoNotOptimize(std::count(text.begin(), text.end(), '\n'));
    double sum = 0.0;
    const char* end = text.data() + text.size();
    for (const char* at = text.data(); at < end;) {
      while (*at == ' ') ++at;
      const char* stop = std::find(at, end, '\n');
      double value = 0.0;
      if (std::from_chars(at, stop, value).ec == std::errc()) sum += value;
      at = stop + 1;
    }
    benchmark::DoNotOptimize(sum);
  }
  state.counters["MB"] = static_cast<double>(text.size()) / 1e6;
}
BENCHMARK(countLinesAndParseNumbers)->Unit(benchmark::kMillisecond);

void readLargeDxf(benchmark::State& state) {
  const std::string& text = theDxf();
  for (auto _ : state) {
    RunControl control;
    auto drawing = read::readDxf(text, "large.dxf", {}, control);
    if (!drawing) state.SkipWithError(drawing.error().message.c_str());
    if (drawing) state.counters["curves"] = static_cast<double>(drawing->curves.size());
  }
}
BENCHMARK(readLargeDxf)->Unit(benchmark::kMillisecond);

void readCsvRows(benchmark::State& state) {
  std::string text = "x_mm,y_mm\n";
  for (int i = 0; i < state.range(0); ++i)
    text += fmt::format("{:.6f},{:.6f}\n", 0.01 * i, std::sin(0.001 * i));
  for (auto _ : state) {
    RunControl control;
    auto drawing = read::readCsvPoints(text, "rows.csv", {}, control);
    if (!drawing) state.SkipWithError(drawing.error().message.c_str());
  }
}
BENCHMARK(readCsvRows)->Arg(1'000'000)->Unit(benchmark::kMillisecond);

// Closed rings of 100 lines each, shuffled and half of them turned round.
void chainLines(benchmark::State& state) {
  std::mt19937_64 random(2);
  std::vector<contour::LooseCurve> curves;
  for (int ring = 0; ring < state.range(0) / 100; ++ring) {
    const curve::Vec2 centre{30.0 * (ring % 100), 30.0 * (ring / 100)};
    const auto corner = [&](int i) {
      const double a = 2.0 * std::numbers::pi * (i % 100) / 100.0;
      return centre + curve::Vec2{10.0 * std::cos(a), 10.0 * std::sin(a)};
    };
    for (int i = 0; i < 100; ++i) {
      curve::Line line{corner(i), corner(i + 1)};
      if (random() % 2 == 0) std::swap(line.a, line.b);
      curves.push_back({line, "", ""});
    }
  }
  std::shuffle(curves.begin(), curves.end(), random);
  for (auto _ : state) {
    RunControl control;
    auto chained = contour::chain(curves, {}, control);
    if (!chained || chained->contours.size() != static_cast<std::size_t>(state.range(0) / 100))
      state.SkipWithError("not chained as drawn");
  }
  state.SetComplexityN(state.range(0));
}
BENCHMARK(chainLines)
    ->RangeMultiplier(10)
    ->Range(10'000, 1'000'000)
    ->Unit(benchmark::kMillisecond)
    ->Complexity();

}  // namespace
}  // namespace kf
