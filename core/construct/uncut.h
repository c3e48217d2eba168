// Where the tool does not reach the contour, and what it leaves; internal to construct.
// Lengths in mm.
#pragma once

#include <vector>

#include "core/construct/offset.h"
#include "core/construct/trim.h"

namespace kf::construct {

// Places of one contour that no kept stretch of the offset belongs to, deeper than options.leastDepth.
std::vector<UncutPlace> uncutPlaces(const contour::Contour& contour, std::size_t index, const RawOffset& raw,
                                    const Trimmed& trimmed, const Clearance& paths,
                                    const OffsetOptions& options);

}  // namespace kf::construct
