// The one place where files are written: whole or not at all.
// No units here.
#pragma once

#include <memory>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/result.h"

namespace kf::write {

// The outputs of one run, which appear together. add() does all that can fail for want of space or
// permission; commit() only renames.
//
// Each file is written to a temporary one in the same folder, synced, read back and compared, then renamed
// into place, and its folder is synced. "-" is standard output. Standard output, pipes and character devices
// can't be staged: commit() writes them first, directly, and puts no file in place when one of them fails.
//
// Durable   a reader, or the machine after a crash, sees the old file or the whole new one.
class Outputs {
 public:
  Outputs();
  ~Outputs();  // removes what was staged and not committed
  Outputs(const Outputs&) = delete;
  Outputs& operator=(const Outputs&) = delete;

  // Fails  cannotWrite  the file exists and `force` is not set; it is a folder; another output of this run
  // has the
  //                     same place; the folder can't be written; the disk is full; what was read back
  //                     differs.
  Result<void> add(const std::string& path, std::string content, bool force);

  // Fails  cannotWrite  a stream could not take its content, or a rename failed. Files that this call had
  // already
  //                     put in place are removed again; one that it had replaced stays replaced.
  Result<void> commit();

 private:
  class Staged;
  std::vector<std::unique_ptr<Staged>> files_;
  struct Stream {
    std::string path, content;
  };
  std::vector<Stream> streams_;
};

// One output alone: add() and commit().
Result<void> writeFile(const std::string& path, std::string_view content, bool force);

}  // namespace kf::write
