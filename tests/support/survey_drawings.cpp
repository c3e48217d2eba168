// Reads every drawing under the given folders, each in a child process of its own with 5 s and 1 GiB, and
// counts what became of them. Fails when one crashes, takes longer or more. Times in s, memory in bytes.
#include <sys/resource.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <csignal>
#include <cstdio>
#include <filesystem>
#include <map>
#include <string>
#include <vector>

#include "core/read/drawing.h"

namespace {

namespace fs = std::filesystem;

constexpr int kSeconds = 5;
constexpr rlim_t kBytes = rlim_t{1} << 30U;
constexpr int kWhole = 0, kPartly = 1, kRefused = 2, kEmpty = 3;

// The child's part: says in a line what it found, and exits with the outcome.
[[noreturn]] void readOne(const std::string& path, int out) {
  const rlimit memory{kBytes, kBytes}, cpu{kSeconds, kSeconds}, core{0, 0};
  setrlimit(RLIMIT_AS, &memory);
  setrlimit(RLIMIT_CPU, &cpu);
  setrlimit(RLIMIT_CORE, &core);
  alarm(kSeconds);
  kf::RunControl control;
  const auto drawing = kf::read::readDrawing(path, {}, control);
  std::string text;
  int outcome = kWhole;
  if (!drawing) {
    outcome = kRefused;
    text = drawing.error().message;
  } else if (!drawing->skipped.empty()) {
    outcome = kPartly;
    for (const kf::read::Skipped& row : drawing->skipped) text += row.kind + " (" + row.reason + "); ";
  } else if (drawing->curves.empty()) {
    outcome = kEmpty;
  }
  if (outcome == kRefused && text.empty()) outcome = 9;
  text.resize(std::min<std::size_t>(text.size(), 4000));
  if (write(out, text.data(), text.size()) < 0) _exit(9);
  _exit(outcome);
}

std::string withoutPlace(std::string text, const std::string& name) {
  if (const std::size_t at = text.find(name); at != std::string::npos) text.erase(at, name.size());
  text.erase(std::remove_if(text.begin(), text.end(), [](char c) { return c >= '0' && c <= '9'; }),
             text.end());
  return text.substr(0, 150);
}

struct Survey {
  std::array<std::size_t, 4> counts{};
  std::size_t failures = 0;
  std::map<std::string, std::size_t> reasons;
};

void take(Survey& survey, const fs::path& path) {
  std::array<int, 2> ends{};
  if (pipe(ends.data()) != 0) std::abort();
  const pid_t child = fork();
  if (child == 0) {
    close(ends[0]);
    readOne(path.string(), ends[1]);
  }
  close(ends[1]);
  std::string text;
  std::array<char, 4096> block{};
  for (ssize_t n = 0; (n = read(ends[0], block.data(), block.size())) > 0;)
    text.append(block.data(), static_cast<std::size_t>(n));
  close(ends[0]);
  int status = 0;
  waitpid(child, &status, 0);
  if (!WIFEXITED(status) || WEXITSTATUS(status) > kEmpty) {
    ++survey.failures;
    std::printf("FAILED %s (%s %d)\n", path.c_str(), WIFEXITED(status) ? "exit" : "signal",
                WIFEXITED(status) ? WEXITSTATUS(status) : WTERMSIG(status));
    return;
  }
  ++survey.counts[static_cast<std::size_t>(WEXITSTATUS(status))];
  if (!text.empty()) ++survey.reasons[withoutPlace(text, path.filename().string())];
}

}  // namespace

int main(int count, char** arguments) {
  std::size_t failures = 0, files = 0;
  for (int i = 1; i < count; ++i) {
    Survey survey;
    std::error_code failure;
    std::vector<fs::path> paths;
    for (const auto& entry : fs::recursive_directory_iterator(arguments[i], failure)) {
      const std::string ending = entry.path().extension().string();
      const bool drawing = ending == ".svg" || ending == ".dxf" || ending == ".step" || ending == ".stp" ||
                           ending == ".igs" || ending == ".iges";
      if (drawing && entry.is_regular_file()) paths.push_back(entry.path());
    }
    std::sort(paths.begin(), paths.end());
    for (const fs::path& path : paths) take(survey, path);
    std::printf(
        "%s: %zu files, %zu read whole, %zu need a yes for what is left out, %zu hold no curve, %zu refused, "
        "%zu failed\n",
        arguments[i], paths.size(), survey.counts[kWhole], survey.counts[kPartly], survey.counts[kEmpty],
        survey.counts[kRefused], survey.failures);
    std::vector<std::pair<std::size_t, std::string>> reasons;
    for (const auto& [reason, times] : survey.reasons) reasons.emplace_back(times, reason);
    std::sort(reasons.rbegin(), reasons.rend());
    for (std::size_t j = 0; j < std::min<std::size_t>(reasons.size(), 25); ++j)
      std::printf("%8zu  %s\n", reasons[j].first, reasons[j].second.c_str());
    failures += survey.failures;
    files += paths.size();
  }
  if (files == 0)
    std::printf("none of these folders is there; install bootstrap-icons and openclipart-svg\n");
  return failures > 0 ? 1 : files == 0 ? 77 : 0;
}
