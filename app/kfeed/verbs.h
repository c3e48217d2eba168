// What the command line asks for, and the verbs that answer. One source a verb.
// Units as the option names say.
#pragma once

#include <functional>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include <fmt/format.h>

#include "core/base/result.h"
#include "core/base/run_control.h"
#include "core/pipeline/pipeline.h"

namespace kf::kfeed {

// Exit codes are a contract with scripts.
enum Exit : int { kDone = 0, kNo = 1, kUsage = 2, kUnreadable = 3, kUnwritable = 4, kInterrupted = 130 };

struct Request {
  std::vector<std::string> drawings;
  bool json = false, quiet = false, force = false, allowSkipped = false;
  std::string units;  // "", "mm" or "in"
  int threads = 1;
  std::vector<std::string> layers;
  std::string contours;  // "1,3-5"
  std::string limitsFile;
  std::vector<std::string> assignments;
  std::string law, joints, uncut;
  std::optional<double> fit;  // mm
  std::string points, summary, outputFolder;
  std::string sampling = "time";
  std::optional<double> step;
  int nodes = 2000;

  bool isBatch() const { return drawings.size() > 1; }
};

int inspect(const Request& request, RunControl& control);
int plan(const Request& request, RunControl& control);

// What one drawing has to say. Gathered, so that drawings worked on side by side speak in their order.
struct Answer {
  std::string out;  // for standard output
  std::string err;  // sentences for people
  int code = kDone;

  template <class... Arguments>
  void print(fmt::format_string<Arguments...> format, Arguments&&... arguments) {
    out += fmt::format(format, std::forward<Arguments>(arguments)...);
  }
  void warn(const Request& request, std::string_view text);
  void fail(const Error& error);
};

// To the standard streams; never throws. False when standard output could not take it.
bool say(const Answer& answer);

// Calls work(path, threads inside it) for each drawing, side by side when there are several, says the answers
// in the drawings' order, and returns the worst code.
int forEachDrawing(const Request& request, RunControl& control,
                   const std::function<Answer(const std::string& path, int threads)>& work);

int exitCodeFor(ErrorCode code);
pipeline::OpenOptions openOptions(const Request& request);

// Numbers from "1,3-5" within 1..count; all when empty.
// Fails  invalidArgument  not such a list, or a number out of range.
Result<std::vector<int>> contourNumbers(const std::string& list, int count);

// Prepares the chosen contours of a drawing: as they are driven under `limits`, or as they are drawn when
// null.
Result<std::vector<pipeline::PreparedContour>> prepareChosen(const pipeline::OpenedDrawing& drawing,
                                                             const Request& request, int threads,
                                                             const limits::Limits* limits,
                                                             const pipeline::PlanOptions& options,
                                                             RunControl& control);

// "12.340", "straight" from a kilometre on, "corner" for 0.
std::string radiusText(double radius);

// "1 contour", "2 contours".
std::string counted(std::size_t n, std::string_view one);

}  // namespace kf::kfeed
