// What the command line asks for, and the verbs that answer. One source a verb.
// Units as the option names say.
#pragma once

#include <optional>
#include <string>
#include <vector>

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
  std::string points, summary, outputFolder;
  std::string sampling = "time";
  std::optional<double> step;
  int nodes = 2000;
};

int inspect(const Request& request, RunControl& control);
int plan(const Request& request, RunControl& control);

// Shared by the verbs.
int exitCodeFor(ErrorCode code);
// Prints one sentence to stderr and returns its exit code.
int fail(const Error& error);
void warn(const Request& request, const std::string& text);
pipeline::OpenOptions openOptions(const Request& request);

// Numbers from "1,3-5" within 1..count; all when empty.
// Fails  invalidArgument  not such a list, or a number out of range.
Result<std::vector<int>> contourNumbers(const std::string& list, int count);

// Prepares the chosen contours of a drawing.
Result<std::vector<pipeline::PreparedContour>> prepareChosen(const pipeline::OpenedDrawing& drawing,
                                                             const Request& request,
                                                             const limits::Limits* limits,
                                                             const pipeline::PlanOptions& options,
                                                             RunControl& control);

// "12.34 mm", "straight" for infinity, "corner" for 0.
std::string radiusText(double radius);

}  // namespace kf::kfeed
