// How the helper process hands a drawing over: a bounded binary form that the other side never trusts.
// Lengths in mm.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>

#include "core/base/result.h"
#include "core/read/drawing.h"

namespace kf::read {

// Either a drawing or the error. Little-endian; every list and text is preceded by its size; the last record
// carries the number of records.
std::string encodeDrawing(const Result<Drawing>& drawing);

// What encodeDrawing wrote, or the error it carried. Sizes are checked against what is there before anything
// is allocated, curves against their domains, numbers for being finite.
//
// Fails  cannotRead  not of this form, cut short, anything after its end; or the error that it carries.
//        unsupported more than maxCurves curves.
Result<Drawing> decodeDrawing(std::string_view bytes, std::size_t maxCurves);

}  // namespace kf::read
