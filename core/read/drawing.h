// What a reader hands over: loose curves in the drawing's own unit, and everything it could not use.
// Lengths in the drawing's unit until scaled by the pipeline.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/result.h"
#include "core/base/run_control.h"
#include "core/contour/chain.h"

namespace kf::read {

// Entities of one kind that were not used, and why.
struct Skipped {
  std::string kind;    // "TEXT"
  std::string reason;  // "text has no contour"
  std::size_t count = 0;
  std::string firstPlace;  // "line 812"
};

struct Drawing {
  std::vector<contour::LooseCurve> curves;
  std::vector<Skipped> skipped;              // geometry that was left out: needs the user's yes
  std::vector<Skipped> ignored;              // annotation and the like that never was geometry: only reported
  std::optional<double> millimetresPerUnit;  // empty when the file does not say
  std::string unitName;                      // "mm", "in", ... or "" when the file does not say
  std::string format;                        // "DXF", "CSV", ...
  std::vector<std::string> layers;           // in order of first use
  std::vector<std::string> warnings;         // what the user should know about how it was read
};

struct ReadOptions {
  std::vector<std::string> layers;  // only these, even if off or frozen; empty: all that are on
  bool hatchBoundaries = false;     // boundaries of filled areas count as geometry
  std::size_t maxCurves = 4'000'000;
  std::size_t maxBytes = std::size_t{1} << 30;
};

// The bytes of a file, or of standard input for "-".
// Fails  cannotRead  it can't be opened or read, is a folder, or is larger than maxBytes.
Result<std::string> readBytes(const std::string& path, std::size_t maxBytes);

// A drawing whose bytes are at hand; `path` gives the ending and the name for messages.
Result<Drawing> readDrawingBytes(std::string_view bytes, const std::string& path, const ReadOptions& options,
                                 RunControl& control);

// Reads by content and ending.
//
// Fails  cannotRead  damaged or truncated input, with line or offset; too large.
//        unsupported a format we don't read, with those we do.
//        cancelled   by `control`.
Result<Drawing> readDrawing(const std::string& path, const ReadOptions& options, RunControl& control);

Result<Drawing> readDxf(std::string_view bytes, std::string_view name, const ReadOptions& options,
                        RunControl& control);
Result<Drawing> readCsvPoints(std::string_view bytes, std::string_view name, const ReadOptions& options,
                              RunControl& control);

// SVG 1.1 and 2: arcs stay arcs, Beziers become splines; groups' labels or ids are the layers. y points
// upwards from the page's lower edge. The unit is that of the page (px, 1/96 in, when it has no physical
// size).
//
// Fails  cannotRead   not well-formed, cut short, or a page size that is not understood.
//        unsupported  compressed, entities of its own, references to outside, too deep or too large.
Result<Drawing> readSvg(std::string_view bytes, std::string_view name, const ReadOptions& options,
                        RunControl& control);

// STEP (ISO 10303-21) and IGES: flat wires, edges and the edges of flat faces, through the helper process;
// see brep_client.h for what it may use. The plane that was found is among the warnings.
//
// Fails  cannotRead   damaged or cut short; the helper crashed, ran out of time or memory, or is missing.
//        unsupported  not flat (with the deviation), no edges, a form that is not read.
Result<Drawing> readStep(std::string_view bytes, std::string_view name, const ReadOptions& options,
                         RunControl& control);
Result<Drawing> readIges(std::string_view bytes, std::string_view name, const ReadOptions& options,
                         RunControl& control);

}  // namespace kf::read
