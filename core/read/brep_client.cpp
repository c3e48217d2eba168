// Starting the helper, feeding it, watching it, and reading its answer.
// Times in s, sizes in bytes.
#include "core/read/brep_client.h"

#include <fcntl.h>
#include <poll.h>
#include <spawn.h>
#include <sys/mman.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <cerrno>
#include <chrono>
#include <csignal>
#include <cstdlib>
#include <filesystem>
#include <utility>

#include <fmt/format.h>

#include "core/read/brep_frame.h"
#include "core/read/brep_wire.h"

namespace kf::read {
namespace {

using Clock = std::chrono::steady_clock;

// A file descriptor that closes itself.
class Descriptor {
 public:
  explicit Descriptor(int number = -1) : number_(number) {}
  Descriptor(const Descriptor&) = delete;
  Descriptor& operator=(const Descriptor&) = delete;
  ~Descriptor() { close(); }
  int get() const { return number_; }
  void close() {
    if (number_ >= 0) ::close(number_);
    number_ = -1;
  }
  void reset(int number) {
    close();
    number_ = number;
  }

 private:
  int number_;
};

bool writeAll(int to, std::string_view bytes) {
  while (!bytes.empty()) {
    const ssize_t n = write(to, bytes.data(), bytes.size());
    if (n < 0 && errno == EINTR) continue;
    if (n <= 0) return false;
    bytes.remove_prefix(static_cast<std::size_t>(n));
  }
  return true;
}

// The bytes as a file in memory that can't be written to any more.
bool sealed(std::string_view bytes, Descriptor& input) {
  input.reset(memfd_create("drawing", MFD_CLOEXEC | MFD_ALLOW_SEALING));
  return input.get() >= 0 && writeAll(input.get(), bytes) && lseek(input.get(), 0, SEEK_SET) == 0 &&
         fcntl(input.get(), F_ADD_SEALS, F_SEAL_SHRINK | F_SEAL_GROW | F_SEAL_WRITE | F_SEAL_SEAL) == 0;
}

pid_t start(const std::string& path, BrepFormat format, const BrepOptions& brep, int input, int output) {
  std::array<std::string, 4> words = {path, format == BrepFormat::step ? "step" : "iges",
                                      std::to_string(brep.cpuSeconds),
                                      std::to_string(brep.memoryBytes >> 20U)};
  std::array<char*, 5> arguments = {words[0].data(), words[1].data(), words[2].data(), words[3].data(),
                                    nullptr};
  std::string locale = "LC_ALL=C", libraries;
  std::array<char*, 3> environment = {locale.data(), nullptr, nullptr};
  if (const char* places = std::getenv("LD_LIBRARY_PATH")) {
    libraries = std::string("LD_LIBRARY_PATH=") + places;
    environment[1] = libraries.data();
  }
  posix_spawn_file_actions_t actions;
  posix_spawn_file_actions_init(&actions);
  posix_spawn_file_actions_adddup2(&actions, input, STDIN_FILENO);
  posix_spawn_file_actions_adddup2(&actions, output, STDOUT_FILENO);
  posix_spawn_file_actions_addopen(&actions, STDERR_FILENO, "/dev/null", O_WRONLY, 0);
  pid_t child = -1;
  const int failure =
      posix_spawn(&child, path.c_str(), &actions, nullptr, arguments.data(), environment.data());
  posix_spawn_file_actions_destroy(&actions);
  return failure == 0 ? child : -1;
}

enum class Ending { finished, cancelled, tooLong, tooMuch };

// Takes what the helper writes until it closes its end, and ends it when it must.
Ending collect(int output, const BrepOptions& brep, RunControl& control, std::string& answer) {
  const Clock::time_point last = Clock::now() + std::chrono::seconds(brep.wallSeconds);
  std::string block(1U << 16U, '\0');
  for (;;) {
    if (control.isCancelled()) return Ending::cancelled;
    if (Clock::now() > last) return Ending::tooLong;
    pollfd watched{output, POLLIN, 0};
    const int ready = poll(&watched, 1, 50);
    if (ready <= 0) continue;
    const ssize_t n = ::read(output, block.data(), block.size());
    if (n < 0 && (errno == EINTR || errno == EAGAIN)) continue;
    if (n <= 0) return Ending::finished;
    answer.append(block, 0, static_cast<std::size_t>(n));
    if (answer.size() > brep.maxAnswerBytes) return Ending::tooMuch;
  }
}

std::string_view formatName(BrepFormat format) {
  return format == BrepFormat::step ? "STEP" : "IGES";
}

// Empty when the helper ended well.
std::string complaint(Ending ending, int status, BrepFormat format, const BrepOptions& brep) {
  if (ending == Ending::tooLong)
    return fmt::format("took the {} reader more than {} s; export it simpler", formatName(format),
                       brep.wallSeconds);
  if (ending == Ending::tooMuch)
    return fmt::format("makes more than {} MiB of curves; split the drawing", brep.maxAnswerBytes >> 20U);
  if (WIFSIGNALED(status)) {
    const int signal = WTERMSIG(status);
    if (signal == SIGXCPU || signal == SIGKILL) {
      return fmt::format("took the {} reader more than {} s; it is damaged, or export it simpler",
                         formatName(format), brep.cpuSeconds);
    }
    return fmt::format("crashed the {} reader (signal {}); it is damaged, export it again",
                       formatName(format), signal);
  }
  if (!WIFEXITED(status) || WEXITSTATUS(status) != 0) {
    return fmt::format("made the {} reader give up (status {}); it is damaged or needs more than {} MiB",
                       formatName(format), WEXITSTATUS(status), brep.memoryBytes >> 20U);
  }
  return {};
}

}  // namespace

std::string brepReaderPath() {
  if (const char* named = std::getenv("KAPPAFEED_BREP_READER"); named != nullptr && *named != '\0')
    return access(named, X_OK) == 0 ? named : "";
  std::error_code failure;
  const std::filesystem::path self = std::filesystem::read_symlink("/proc/self/exe", failure);
  if (failure) return {};
  const std::filesystem::path folder = self.parent_path();
  for (const std::filesystem::path& place :
       {folder / "brep_reader", folder.parent_path() / "lib" / "kappafeed" / "brep_reader"}) {
    if (access(place.c_str(), X_OK) == 0) return place.string();
  }
  return {};
}

Result<Drawing> readBrep(std::string_view bytes, std::string_view name, BrepFormat format,
                         const ReadOptions& options, const BrepOptions& brep, RunControl& control) {
  const auto refused = [name](std::string_view what) {
    return Error{ErrorCode::cannotRead, fmt::format("{} {}", name, what)};
  };
  auto whole = format == BrepFormat::step ? checkStepFrame(bytes, name) : checkIgesFrame(bytes, name);
  if (!whole) return whole.error();
  const std::string path = brepReaderPath();
  if (path.empty()) {
    return refused("can't be read: the helper brep_reader is not beside this program; install it whole");
  }
  Descriptor input, output, theirs;
  std::array<int, 2> ends{};
  if (!sealed(bytes, input) || pipe2(ends.data(), O_CLOEXEC) != 0)
    return refused(
        "can't be handed to the helper; there is no memory or no file handle left, close something");
  output.reset(ends[0]);
  theirs.reset(ends[1]);
  const pid_t child = start(path, format, brep, input.get(), theirs.get());
  theirs.close();
  input.close();
  if (child < 0) return refused(fmt::format("can't be read: the helper {} does not start", path));
  std::string answer;
  const Ending ending = collect(output.get(), brep, control, answer);
  if (ending != Ending::finished) kill(child, SIGKILL);
  int status = 0;
  while (waitpid(child, &status, 0) < 0 && errno == EINTR) {
  }
  if (ending == Ending::cancelled) return Error{ErrorCode::cancelled, "cancelled"};
  if (const std::string text = complaint(ending, status, format, brep); !text.empty()) return refused(text);
  auto drawing = decodeDrawing(answer, options.maxCurves);
  if (!drawing) return Error{drawing.error().code, fmt::format("{}: {}", name, drawing.error().message)};
  if (!options.layers.empty()) {
    std::erase_if(drawing->curves, [&options](const contour::LooseCurve& loose) {
      return std::find(options.layers.begin(), options.layers.end(), loose.layer) == options.layers.end();
    });
  }
  control.report(1.0);
  return drawing;
}

Result<Drawing> readStep(std::string_view bytes, std::string_view name, const ReadOptions& options,
                         RunControl& control) {
  return readBrep(bytes, name, BrepFormat::step, options, {}, control);
}

Result<Drawing> readIges(std::string_view bytes, std::string_view name, const ReadOptions& options,
                         RunControl& control) {
  return readBrep(bytes, name, BrepFormat::iges, options, {}, control);
}

}  // namespace kf::read
