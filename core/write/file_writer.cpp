// The one place where files are written.
// No units here.
#include "core/write/file_writer.h"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cerrno>
#include <cstdio>
#include <cstring>
#include <filesystem>

#include <fmt/format.h>

namespace kf::write {
namespace {

Error failed(const std::string& path, std::string_view what) {
  return {ErrorCode::cannotWrite, fmt::format("{} was not written: {}", path, what)};
}
Error failedWith(const std::string& path, std::string_view doing) {
  return failed(path, fmt::format("{} failed ({}); check the folder, its permissions and the free space",
                                  doing, std::strerror(errno)));
}

// Closes and removes what was begun unless told that it was finished.
class Temporary {
 public:
  explicit Temporary(std::string path) : path_(std::move(path)) {}
  ~Temporary() {
    if (fd_ >= 0) ::close(fd_);
    if (!path_.empty() && created_) ::unlink(path_.c_str());
  }
  Temporary(const Temporary&) = delete;
  Temporary& operator=(const Temporary&) = delete;

  bool create() {
    fd_ = ::mkstemp(path_.data());
    created_ = fd_ >= 0;
    return created_;
  }
  int descriptor() const { return fd_; }
  const std::string& path() const { return path_; }
  bool close() {
    const int fd = fd_;
    fd_ = -1;
    return ::close(fd) == 0;
  }
  void keep() { created_ = false; }

 private:
  std::string path_;
  int fd_ = -1;
  bool created_ = false;
};

bool writeAll(int fd, std::string_view content) {
  while (!content.empty()) {
    const ssize_t n = ::write(fd, content.data(), content.size());
    if (n < 0 && errno == EINTR) continue;
    if (n <= 0) return false;
    content.remove_prefix(static_cast<std::size_t>(n));
  }
  return true;
}

bool sameAsWritten(int fd, std::string_view content) {
  if (::lseek(fd, 0, SEEK_SET) != 0) return false;
  std::string block(1U << 16U, '\0');
  for (;;) {
    const ssize_t n = ::read(fd, block.data(), block.size());
    if (n < 0 && errno == EINTR) continue;
    if (n < 0) return false;
    if (n == 0) return content.empty();
    const auto count = static_cast<std::size_t>(n);
    if (count > content.size() || std::memcmp(block.data(), content.data(), count) != 0) return false;
    content.remove_prefix(count);
  }
}

Result<void> toStandardOutput(std::string_view content) {
  if (!writeAll(STDOUT_FILENO, content)) return failedWith("standard output", "writing");
  return {};
}

bool syncFolder(const std::string& folder) {
  const int fd = ::open(folder.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC);
  if (fd < 0) return false;
  // Some file systems can't sync a folder; that is no failure of ours.
  const bool synced = ::fsync(fd) == 0 || errno == EINVAL || errno == ENOTSUP;
  ::close(fd);
  return synced;
}

mode_t usualMode() {
  const mode_t mask = ::umask(0);
  ::umask(mask);
  return 0666U & ~mask;
}

}  // namespace

Result<void> writeFile(const std::string& path, std::string_view content, bool force) {
  if (path == "-") return toStandardOutput(content);
  struct stat existing {};
  const bool exists = ::stat(path.c_str(), &existing) == 0;
  if (exists && S_ISDIR(existing.st_mode)) return failed(path, "it is a folder; name a file");
  if (exists && !S_ISREG(existing.st_mode)) return failed(path, "it is no ordinary file; name another");
  if (exists && !force)
    return failed(path, "it exists already; choose another name or allow replacing it (--force)");
  std::error_code failure;
  // A link is followed, so that what it points to is replaced and the link stays.
  const std::filesystem::path target =
      exists ? std::filesystem::canonical(path, failure) : std::filesystem::path(path);
  if (failure) return failed(path, "the link can't be followed");
  const std::string folder = target.has_parent_path() ? target.parent_path().string() : ".";
  Temporary temporary(fmt::format("{}/.{}.XXXXXX", folder, target.filename().string().substr(0, 200)));
  if (!temporary.create()) return failedWith(path, "making a temporary file beside it");
  if (::fchmod(temporary.descriptor(), exists ? existing.st_mode & 0777U : usualMode()) != 0)
    return failedWith(path, "setting its permissions");
  if (!writeAll(temporary.descriptor(), content)) return failedWith(path, "writing");
  if (::fsync(temporary.descriptor()) != 0) return failedWith(path, "syncing to disk");
  if (!sameAsWritten(temporary.descriptor(), content))
    return failed(path, "what was read back differs from what was written; check the disk");
  if (!temporary.close()) return failedWith(path, "closing");
  if (force) {
    if (::rename(temporary.path().c_str(), target.c_str()) != 0) return failedWith(path, "renaming");
    temporary.keep();
  } else {
    // link() never replaces, even when somebody made the file in the meantime.
    if (::link(temporary.path().c_str(), target.c_str()) != 0) {
      if (errno == EEXIST)
        return failed(path,
                      "it appeared in the meantime; choose another name or allow replacing it (--force)");
      if (errno != EPERM && errno != ENOTSUP && errno != ENOSYS) return failedWith(path, "renaming");
      if (::rename(temporary.path().c_str(), target.c_str()) != 0) return failedWith(path, "renaming");
      temporary.keep();
    }
  }
  if (!syncFolder(folder)) return failedWith(path, "syncing its folder");
  return {};
}

}  // namespace kf::write
