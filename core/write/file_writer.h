// The one place where files are written: whole or not at all.
// No units here.
#pragma once

#include <string>
#include <string_view>

#include "core/base/result.h"

namespace kf::write {

// Puts `content` at `path`: a temporary file in the same folder, written, synced, read back and compared,
// then renamed; then the folder is synced. "-" writes to standard output instead.
//
// Fails     cannotWrite  the file exists and `force` is not set; the folder can't be written; the disk is
// full; what was
//                        read back differs. The old file is then as it was, and no temporary file is left.
// Durable   a reader, or the machine after a crash, sees the old file or the whole new one.
Result<void> writeFile(const std::string& path, std::string_view content, bool force);

}  // namespace kf::write
