// The one place where files are written: whole or not at all.
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
  return {ErrorCode::cannotWrite,
          fmt::format("{} was not written: {}", path == "-" ? "standard output" : path, what)};
}
// Call it before anything else can change errno.
Error failedWith(const std::string& path, std::string_view doing) {
  const std::string why = std::strerror(errno);
  return failed(
      path, path == "-" ? fmt::format("{} failed ({})", doing, why)
                        : fmt::format("{} failed ({}); check the folder, its permissions and the free space",
                                      doing, why));
}

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

Result<void> toStream(const std::string& path, std::string_view content) {
  if (path == "-") {
    std::fflush(stdout);  // what was printed before comes first
    if (!writeAll(STDOUT_FILENO, content)) return failedWith(path, "writing");
    return {};
  }
  const int fd = ::open(path.c_str(), O_WRONLY | O_CLOEXEC);
  if (fd < 0) return failedWith(path, "opening");
  const bool written = writeAll(fd, content);
  Result<void> done;
  if (!written) done = failedWith(path, "writing");
  if (::close(fd) != 0 && written) done = failedWith(path, "closing");
  return done;
}

}  // namespace

// One temporary file beside its target.
class Outputs::Staged {
 public:
  Staged(std::string path, std::filesystem::path target, bool force)
      : path_(std::move(path)), target_(std::move(target)), force_(force) {}
  ~Staged() {
    if (fd_ >= 0) ::close(fd_);
    removeTemporary();
  }
  Staged(const Staged&) = delete;
  Staged& operator=(const Staged&) = delete;

  const std::filesystem::path& target() const { return target_; }

  // Writes, syncs and compares the temporary file. `mode` is that of the file to be.
  Result<void> stage(std::string_view content, mode_t mode) {
    temporary_ = fmt::format("{}/.{}.XXXXXX", folder(), target_.filename().string().substr(0, 200));
    fd_ = ::mkostemp(temporary_.data(), O_CLOEXEC);
    if (fd_ < 0) {
      const auto failure = failedWith(path_, "making a temporary file beside it");
      temporary_.clear();
      return failure;
    }
    if (::fchmod(fd_, mode) != 0) return failedWith(path_, "setting its permissions");
    if (!writeAll(fd_, content)) return failedWith(path_, "writing");
    if (::fsync(fd_) != 0) return failedWith(path_, "syncing to disk");
    if (!sameAsWritten(fd_, content))
      return failed(path_, "what was read back differs from what was written; check the disk");
    const int fd = fd_;
    fd_ = -1;
    if (::close(fd) != 0) return failedWith(path_, "closing");
    return {};
  }

  Result<void> putInPlace() {
    if (!force_) {
      // link() never replaces, even when somebody made the file in the meantime.
      if (::link(temporary_.c_str(), target_.c_str()) == 0) {
        made_ = true;
        removeTemporary();
        return {};
      }
      if (errno == EEXIST)
        return failed(path_,
                      "it appeared in the meantime; choose another name or allow replacing it (--force)");
      // A file system without links: the name was free a moment ago.
      if (errno != EPERM && errno != ENOTSUP && errno != ENOSYS) return failedWith(path_, "renaming");
    }
    if (::rename(temporary_.c_str(), target_.c_str()) != 0) return failedWith(path_, "renaming");
    temporary_.clear();
    return {};
  }

  Result<void> sync() const {
    if (!syncFolder(folder())) return failedWith(path_, "syncing its folder");
    return {};
  }

  void takeBack() {
    if (made_) ::unlink(target_.c_str());
    made_ = false;
  }

 private:
  std::string folder() const { return target_.has_parent_path() ? target_.parent_path().string() : "."; }
  void removeTemporary() {
    if (!temporary_.empty()) ::unlink(temporary_.c_str());
    temporary_.clear();
  }

  std::string path_;  // as asked for, for messages
  std::filesystem::path target_;
  bool force_;
  std::string temporary_;
  int fd_ = -1;
  bool made_ = false;
};

Outputs::Outputs() = default;
Outputs::~Outputs() = default;

Result<void> Outputs::add(const std::string& path, std::string content, bool force) {
  if (path.empty()) return failed("the output", "its name is empty");
  struct stat existing {};
  const bool exists = path != "-" && ::stat(path.c_str(), &existing) == 0;
  if (exists && S_ISDIR(existing.st_mode)) return failed(path, "it is a folder; name a file");
  if (path == "-" || (exists && (S_ISCHR(existing.st_mode) || S_ISFIFO(existing.st_mode)))) {
    streams_.push_back({path, std::move(content)});
    return {};
  }
  if (exists && !S_ISREG(existing.st_mode)) return failed(path, "it is no ordinary file; name another");
  if (exists && !force)
    return failed(path, "it exists already; choose another name or allow replacing it (--force)");
  std::error_code failure;
  // A link is followed, so that what it points to is replaced and the link stays.
  const std::filesystem::path target =
      std::filesystem::weakly_canonical(std::filesystem::absolute(path), failure);
  if (failure) return failed(path, "its place can't be found; check the folder and its links");
  for (const auto& file : files_) {
    if (file->target() == target) return failed(path, "another output of this run goes to the same place");
  }
  auto staged = std::make_unique<Staged>(path, target, force);
  if (auto done = staged->stage(content, exists ? existing.st_mode & 0777U : usualMode()); !done) return done;
  files_.push_back(std::move(staged));
  return {};
}

Result<void> Outputs::commit() {
  for (const Stream& stream : streams_) {
    if (auto done = toStream(stream.path, stream.content); !done) return done;
  }
  for (const auto& file : files_) {
    if (auto done = file->putInPlace(); !done) {
      for (const auto& earlier : files_) earlier->takeBack();
      return done;
    }
  }
  for (const auto& file : files_) {
    if (auto done = file->sync(); !done) return done;
  }
  files_.clear();
  streams_.clear();
  return {};
}

Result<void> writeFile(const std::string& path, std::string_view content, bool force) {
  Outputs outputs;
  if (auto done = outputs.add(path, std::string(content), force); !done) return done;
  return outputs.commit();
}

}  // namespace kf::write
