// Whether a STEP or IGES file is there from its first to its last line, judged from its text alone; internal
// to read. No units here.
#pragma once

#include <string_view>

#include "core/base/result.h"

namespace kf::read {

// ISO 10303-21: begins ISO-10303-21; ends END-ISO-10303-21; its sections are closed, its texts and comments
// too, and every instance that is referred to is defined, once. Fails  cannotRead  with the line.  Cost: one
// pass.
Result<void> checkStepFrame(std::string_view bytes, std::string_view name);

// IGES 5.3 fixed form: lines of 80 columns with a section letter in column 73 and numbers that rise by one;
// the terminate record counts the lines of each section; each directory entry points at parameter lines that
// point back. Shorter lines would be cut ones.
// Fails  cannotRead   with the line.
//        unsupported  the compressed or the binary form.
Result<void> checkIgesFrame(std::string_view bytes, std::string_view name);

}  // namespace kf::read
