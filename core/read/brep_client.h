// Reading STEP and IGES through the helper process.
// Lengths in mm, times in s, sizes in bytes.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>

#include "core/base/result.h"
#include "core/base/run_control.h"
#include "core/read/drawing.h"

namespace kf::read {

enum class BrepFormat { step, iges };

struct BrepOptions {
  unsigned cpuSeconds = 60;                         // of the helper
  unsigned wallSeconds = 120;                       // then it is ended
  std::size_t memoryBytes = std::size_t{2} << 30U;  // of the helper
  std::size_t maxAnswerBytes = std::size_t{512} << 20U;
};

// The helper's file: the environment variable KAPPAFEED_BREP_READER, else brep_reader beside this program,
// else
// ../lib/kappafeed/brep_reader from there. Empty when none can be run.
std::string brepReaderPath();

// Flat wires and edges in mm. The bytes are checked for being whole, handed over in memory that nobody can
// write any more, and read by a process that ends with a crash, a hang or a greedy file in place of this one.
//
// Fails  cannotRead   damaged or cut short; the helper crashed, ran out of time or memory, or is missing.
//        unsupported  not flat (with the deviation), no edges, a form that is not read.
//        cancelled    by `control`; the helper is ended.
Result<Drawing> readBrep(std::string_view bytes, std::string_view name, BrepFormat format,
                         const ReadOptions& options, const BrepOptions& brep, RunControl& control);

}  // namespace kf::read
