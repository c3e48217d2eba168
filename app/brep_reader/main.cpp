// The helper: reads one STEP or IGES file from standard input, writes the drawing to standard output in the
// form of core/read/brep_wire.h, and ends. A file that crashes the library takes only this process with it.
// Lengths in mm.
#include <fcntl.h>
#include <unistd.h>

#include <cstdio>
#include <cstdlib>
#include <string>
#include <string_view>

#include "app/brep_reader/load.h"
#include "app/brep_reader/sandbox.h"
#include "core/read/brep_wire.h"
#include "core/read/text.h"

namespace {

bool writeAll(int out, std::string_view bytes) {
  while (!bytes.empty()) {
    const ssize_t n = write(out, bytes.data(), bytes.size());
    if (n <= 0) return false;
    bytes.remove_prefix(static_cast<std::size_t>(n));
  }
  return true;
}

}  // namespace

int main(int count, char** arguments) {
  if (count != 4) {
    std::fputs("brep_reader is started by kappafeed and kfeed; it takes step|iges, seconds and MiB\n",
               stderr);
    return 2;
  }
  const std::string_view kind = arguments[1];
  const auto seconds = kf::read::parseInteger(arguments[2]), mebibytes = kf::read::parseInteger(arguments[3]);
  if ((kind != "step" && kind != "iges") || !seconds || *seconds < 1 || !mebibytes || *mebibytes < 1)
    return 2;
  // The libraries print to standard output, which is not theirs.
  const int out = dup(STDOUT_FILENO), nowhere = open("/dev/null", O_WRONLY);
  if (out < 0 || nowhere < 0 || dup2(nowhere, STDOUT_FILENO) < 0 || dup2(nowhere, STDERR_FILENO) < 0)
    return 3;
  kf::brep::Sandbox sandbox;
  sandbox.cpuSeconds = static_cast<unsigned>(*seconds);
  sandbox.memoryBytes = static_cast<std::size_t>(*mebibytes) << 20U;
  if (!kf::brep::enterSandbox(sandbox)) return 3;
  const auto format = kind == "step" ? kf::brep::Format::step : kf::brep::Format::iges;
  const auto drawing = kf::brep::drawingOf("/proc/self/fd/0", format);
  const bool written = writeAll(out, kf::read::encodeDrawing(drawing));
  _exit(written ? 0 : 4);  // the libraries' own tidying up can't be trusted after a damaged file
}
