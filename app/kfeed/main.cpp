// kfeed: the command line. Reads the options, stops cleanly on an interrupt, and hands over to a verb.
// Units as the option names say.
#include <CLI/CLI.hpp>
#include <algorithm>
#include <cmath>
#include <csignal>
#include <cstdio>
#include <filesystem>

#include <fmt/format.h>

#include "app/kfeed/verbs.h"

namespace kf::kfeed {
namespace {

RunControl control;
volatile std::sig_atomic_t interrupts = 0;

// The second interrupt ends the program at once; outputs are written whole or not at all either way.
extern "C" void onInterrupt(int) {
  if (interrupts > 0) std::_Exit(kInterrupted);
  interrupts = 1;
  control.cancel();
}

// Without SA_RESTART: a read that waits for standard input ends with the first interrupt.
void watchInterrupts() {
  struct sigaction action {};
  action.sa_handler = onInterrupt;
  sigemptyset(&action.sa_mask);
  for (int number : {SIGINT, SIGTERM}) sigaction(number, &action, nullptr);
  std::signal(SIGPIPE, SIG_IGN);
}

const std::string kVersionText = std::string("kfeed ") + KAPPAFEED_VERSION;

void commonOptions(CLI::App& verb, Request& request) {
  verb.set_version_flag("--version", kVersionText);
  verb.add_option("DRAWING", request.drawings,
                  "drawings to read (DXF, SVG, STEP, IGES, or CSV points); - for standard input")
      ->required();
  verb.add_flag("--json", request.json, "one JSON document on standard output, and nothing else there");
  verb.add_option("--units", request.units, "unit of a drawing that does not say: mm or in")
      ->check(CLI::IsMember({"mm", "in"}));
  verb.add_option("--contour", request.contours, "which contours, 1-based, like 1,3-5 (default all)");
  verb.add_option("--layer", request.layers, "read only this layer; may be repeated")->take_all();
  verb.add_flag("--allow-skipped", request.allowSkipped, "go on although some entities can't be used");
  verb.add_flag("--quiet", request.quiet, "no messages but errors");
  verb.add_option("--threads", request.threads, "how many threads to use")->check(CLI::Range(1, 256));
}

void planOptions(CLI::App& verb, Request& request, std::string& pending) {
  verb.add_option("--limits", request.limitsFile, "the limits file (JSON); - for standard input")->required();
  verb.add_option("--set", request.assignments, "NAME=VALUE, any limit by its dotted name; may be repeated")
      ->take_all()
      ->allow_extra_args(false);
  verb.add_option("--law", request.law, "acceleration or jerk")
      ->check(CLI::IsMember({"acceleration", "jerk"}));
  verb.add_option("--fit", request.fit,
                  "fit lines, arcs and splines through runs of short segments, within this many mm")
      ->check(CLI::PositiveNumber);
  verb.add_option("--uncut", request.uncut,
                  "where the tool does not reach the contour: trim (default, reported) or refuse")
      ->check(CLI::IsMember({"trim", "refuse"}));
  verb.add_option("--joints", request.joints, "blend or exact")->check(CLI::IsMember({"blend", "exact"}));
  verb.add_option("--nodes", request.nodes, "about how many nodes along each contour")
      ->check(CLI::Range(50, 2'000'000));
  verb.add_option("--points", request.points, "write the point list here; - for standard output");
  verb.add_option("--sample", request.sampling, "rows of the point list by chord, time or length")
      ->check(CLI::IsMember({"chord", "time", "length"}));
  verb.add_option("--step", request.step, "mm of chord error, s, or mm");
  verb.add_option("--summary", request.summary, "write the summary here (JSON)");
  verb.add_option(
      "--output-folder", request.outputFolder,
      "outputs go into this folder, named after each drawing; --points and --summary then give the "
      "ending, like .csv");
  verb.add_flag("--force", request.force, "replace existing output files");
  for (const char* name : {"--program", "--report", "--job"})
    verb.add_option(name, pending, "not available yet");
}

int usage(std::string_view text) {
  Answer answer;
  answer.fail({ErrorCode::invalidArgument, std::string(text)});
  say(answer);
  return answer.code;
}

int notYet(std::string_view what) {
  return usage(fmt::format("{} is not available yet", what));
}

// What standard input and output can be shared by.
int checkStreams(const Request& request) {
  const auto fromStdin =
      std::count(request.drawings.begin(), request.drawings.end(), "-") + (request.limitsFile == "-" ? 1 : 0);
  if (fromStdin > 1) return usage("only one of the inputs can be standard input (-)");
  const int toStdout =
      (request.json ? 1 : 0) + (request.points == "-" ? 1 : 0) + (request.summary == "-" ? 1 : 0);
  if (toStdout > 1) return usage("only one of --json, --points - and --summary - can have standard output");
  if (request.isBatch() && toStdout > 0) {
    return usage(
        "several drawings can't share standard output; name one drawing, or use --summary with "
        "--output-folder");
  }
  return kDone;
}

// What the options mean together, beyond what each says alone.
int checkPlan(const CLI::App& verb, const Request& request) {
  for (const char* name : {"--program", "--report", "--job"}) {
    if (verb.count(name) > 0) return notYet(name);
  }
  if (request.isBatch() && request.outputFolder.empty() &&
      !(request.points.empty() && request.summary.empty())) {
    return usage("several drawings can't share an output file; name a folder with --output-folder");
  }
  if (!request.outputFolder.empty()) {
    std::error_code failure;
    if (!std::filesystem::is_directory(request.outputFolder, failure))
      return usage(fmt::format("{} is not a folder; make it first", request.outputFolder));
    for (const std::string* ending : {&request.points, &request.summary}) {
      if (!ending->empty() && (ending->find('/') != std::string::npos || ending->front() == '-'))
        return usage(fmt::format("with --output-folder an output is named by its ending, like .csv, not '{}'",
                                 *ending));
    }
  }
  if (request.step && (!std::isfinite(*request.step) || !(*request.step > 0.0)))
    return usage(fmt::format("--step must be a positive number, not {}", *request.step));
  return kDone;
}

int run(int argc, char** argv) {
  CLI::App app{"kfeed: feed planning along 2D contours, for scripts and batch work", "kfeed"};
  app.set_version_flag("--version", kVersionText);
  app.require_subcommand(1);
  Request request;
  std::string pending;
  CLI::App* inspectVerb =
      app.add_subcommand("inspect", "list contours, joints and tight spots: geometry only");
  commonOptions(*inspectVerb, request);
  CLI::App* planVerb = app.add_subcommand("plan", "plan every chosen contour and write what is asked for");
  commonOptions(*planVerb, request);
  planOptions(*planVerb, request, pending);
  app.add_subcommand("check", "audit an exported file (not available yet)")->allow_extras();
  app.add_subcommand("identify", "estimate a machine's limits from recorded motion (not available yet)")
      ->allow_extras();
  try {
    app.parse(argc, argv);
  } catch (const CLI::CallForHelp& e) {
    return app.exit(e);
  } catch (const CLI::CallForVersion& e) {
    return app.exit(e);
  } catch (const CLI::ParseError& e) {
    if (app.get_subcommands().empty()) {
      constexpr std::string_view verbs = "name a verb: inspect, plan, check or identify; see kfeed --help";
      return usage(argc > 1 ? fmt::format("'{}' is neither a verb nor an option; {}", argv[1], verbs)
                            : std::string(verbs));
    }
    return usage(fmt::format("{}; see kfeed {} --help", e.what(), app.get_subcommands().front()->get_name()));
  }
  if (app.got_subcommand("check")) return notYet("check");
  if (app.got_subcommand("identify")) return notYet("identify");
  if (const int code = checkStreams(request); code != kDone) return code;
  if (inspectVerb->parsed()) return inspect(request, control);
  if (const int code = checkPlan(*planVerb, request); code != kDone) return code;
  return plan(request, control);
}

}  // namespace
}  // namespace kf::kfeed

int main(int argc, char** argv) {
  using namespace kf::kfeed;
  watchInterrupts();
  const int code = run(argc, argv);
  if (code == kInterrupted) {
    std::fputs("kfeed: interrupted; outputs are whole where they exist, and nothing was half-written\n",
               stderr);
  } else if (std::fflush(stdout) != 0 || std::ferror(stdout) != 0) {
    std::fputs("kfeed: standard output could not be written; check the disk or the program it goes to\n",
               stderr);
    return kUnwritable;
  }
  return code;
}
