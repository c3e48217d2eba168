// STEP and IGES through the helper process: samples, planes, damage, and what the process may do.
// Lengths in mm.
#include <sys/resource.h>
#include <sys/socket.h>
#include <sys/wait.h>
#include <unistd.h>
#include <BRep_Builder.hxx>
#include <gp_Ax1.hxx>

#include <algorithm>
#include <array>
#include <cerrno>
#include <chrono>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <numbers>
#include <sstream>
#include <string>
#include <thread>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "app/brep_reader/sandbox.h"
#include "core/curve/arc_length.h"
#include "core/read/brep_client.h"
#include "core/read/brep_frame.h"
#include "tests/support/brep_writing.h"

namespace kf::read {
namespace {

using curve::Vec2;
using ::testing::HasSubstr;
namespace fs = std::filesystem;

const std::string kSamples = std::string(KF_SOURCE_DIR) + "/samples/";

std::string fileText(const std::string& path) {
  std::ifstream file(path, std::ios::binary);
  std::stringstream text;
  text << file.rdbuf();
  return text.str();
}

Result<Drawing> read(const std::string& path) {
  RunControl control;
  return readDrawing(path, {}, control);
}

double lengthOf(const Drawing& drawing) {
  double sum = 0.0;
  for (const auto& loose : drawing.curves) sum += curve::totalLength(loose.curve);
  return sum;
}

curve::Box boxOf(const Drawing& drawing) {
  curve::Box box;
  for (const auto& loose : drawing.curves) box.include(loose.curve.bounds());
  return box;
}

// A folder of its own that goes away with the test.
class Folder {
 public:
  Folder() {
    std::string name = (fs::temp_directory_path() / "kf_brep_XXXXXX").string();
    path_ = mkdtemp(name.data());
  }
  ~Folder() {
    std::error_code failure;
    fs::remove_all(path_, failure);
  }
  std::string file(const std::string& name) const { return path_ + "/" + name; }

 private:
  std::string path_;
};

// While it lives, the helper is another program.
class OtherHelper {
 public:
  explicit OtherHelper(const std::string& path) { setenv("KAPPAFEED_BREP_READER", path.c_str(), 1); }
  ~OtherHelper() { unsetenv("KAPPAFEED_BREP_READER"); }
};

std::string script(const Folder& folder, const std::string& content) {
  const std::string path = folder.file("helper.sh");
  std::ofstream(path) << "#!/bin/sh\n" << content << "\n";
  fs::permissions(path, fs::perms::owner_all);
  return path;
}

// One curve of each kind, the spline rational and with inner knots.
std::vector<curve::Curve> oneOfEach() {
  const double pi = std::numbers::pi;
  auto spline =
      curve::makeNurbs(3, {0, 0, 0, 0, 1, 2, 2, 3, 3, 3, 3},
                       {{0, 0}, {1, 2}, {3, 3}, {4, 0}, {6, 1}, {7, 3}, {9, 0}}, {1, 2, 1, 0.5, 1, 3, 1});
  return {curve::Line{{1, 2}, {31, 42}},
          curve::Arc{{5, 5}, 12.5, 0.3, 2.0},
          curve::Arc{{5, 5}, 7.0, 0.3, -4.0},
          curve::Arc{{50, 5}, 3.0, 0.0, 2 * pi},
          curve::EllipticArc{{20, 20}, {30, 0}, {0, 12}, 0.5, 2.5},
          curve::EllipticArc{{20, 20}, {0, -8}, {20, 0}, 0.2, -1.5},
          *spline};
}

gp_Trsf tilted() {
  gp_Trsf turn, move;
  turn.SetRotation(gp_Ax1(gp_Pnt(0, 0, 0), gp_Dir(1, 2, 3)), 0.8);
  move.SetTranslation(gp_Vec(10, -20, 30));
  return move * turn;
}

// Sorted lengths and pairwise distances of the curves' ends do not depend on the plane's axes.
std::vector<double> shapeNumbers(const std::vector<curve::Curve>& curves) {
  std::vector<double> numbers;
  for (const curve::Curve& c : curves) numbers.push_back(curve::totalLength(c));
  for (const curve::Curve& a : curves) {
    for (const curve::Curve& b : curves) {
      for (double u : {0.0, 0.5, 1.0}) {
        const auto at = [u](const curve::Curve& c) {
          return c.point(c.first() + u * (c.last() - c.first()));
        };
        numbers.push_back(distance(at(a), at(b)));
      }
    }
  }
  std::sort(numbers.begin(), numbers.end());
  return numbers;
}

std::vector<curve::Curve> curvesOf(const Drawing& drawing) {
  std::vector<curve::Curve> curves;
  for (const auto& loose : drawing.curves) curves.push_back(loose.curve);
  return curves;
}

TEST(StepSample, IsTheDxfSampleItWasMadeFrom) {
  auto step = read(kSamples + "propeller_template.step"), dxf = read(kSamples + "propeller_template.dxf");
  ASSERT_TRUE(step.ok()) << step.error().message;
  ASSERT_TRUE(dxf.ok());
  EXPECT_EQ(step->format, "STEP");
  EXPECT_EQ(step->curves.size(), dxf->curves.size());
  EXPECT_NEAR(lengthOf(*step), lengthOf(*dxf), 1e-9 * lengthOf(*dxf));
  EXPECT_NEAR(norm(boxOf(*step).high - boxOf(*dxf).high), 0.0, 1e-9);
  ASSERT_FALSE(step->warnings.empty());
  EXPECT_THAT(step->warnings[0], HasSubstr("flat in the plane z = 0 mm"));
}

// The IGES writer rounds to nine digits.
TEST(IgesSample, IsTheDxfSampleItWasMadeFrom) {
  auto iges = read(kSamples + "cam_plate.igs"), dxf = read(kSamples + "cam_plate.dxf");
  ASSERT_TRUE(iges.ok()) << iges.error().message;
  ASSERT_TRUE(dxf.ok());
  EXPECT_NEAR(lengthOf(*iges), lengthOf(*dxf), 2e-8 * lengthOf(*dxf));
  EXPECT_NEAR(norm(boxOf(*iges).low - boxOf(*dxf).low), 0.0, 1e-6);
}

TEST(StepReading, KeepsEveryKindOfCurveInAnyPlane) {
  const Folder folder;
  const auto curves = oneOfEach();
  const auto expected = shapeNumbers(curves);
  for (const gp_Trsf& place : {gp_Trsf(), tilted()}) {
    const std::string path = folder.file("a.step");
    ASSERT_TRUE(test::writeStep(test::shapeOf(curves, place), path, "a"));
    auto drawing = read(path);
    ASSERT_TRUE(drawing.ok()) << drawing.error().message;
    ASSERT_EQ(drawing->curves.size(), curves.size());
    const auto found = shapeNumbers(curvesOf(*drawing));
    for (std::size_t i = 0; i < expected.size(); ++i) EXPECT_NEAR(found[i], expected[i], 1e-9) << i;
    EXPECT_NE(drawing->curves[0].curve.asLine(), nullptr);
    EXPECT_NE(drawing->curves[1].curve.asArc(), nullptr);
    EXPECT_NE(drawing->curves[4].curve.asEllipticArc(), nullptr);
    ASSERT_NE(drawing->curves[6].curve.asNurbs(), nullptr);
    EXPECT_EQ(drawing->curves[6].curve.asNurbs()->weights.size(), 7U);
  }
}

TEST(StepReading, KeepsTheCoordinatesOfALevelPlane) {
  const Folder folder;
  gp_Trsf up;
  up.SetTranslation(gp_Vec(0, 0, 7.5));
  ASSERT_TRUE(test::writeStep(test::shapeOf({curve::Line{{1, 2}, {31, 42}}}, up), folder.file("a.stp"), "a"));
  auto drawing = read(folder.file("a.stp"));
  ASSERT_TRUE(drawing.ok()) << drawing.error().message;
  EXPECT_EQ(drawing->curves[0].curve.startPoint(), (Vec2{1, 2}));
  EXPECT_THAT(drawing->warnings[0], HasSubstr("z = 7.5 mm"));
}

TEST(IgesReading, KeepsCurvesAndTurnsUnitsIntoMillimetres) {
  const Folder folder;
  const std::vector<curve::Curve> curves = {curve::Line{{1, 2}, {31, 42}},
                                            curve::Arc{{5, 5}, 12.5, 0.3, 2.0}};
  for (const char* unit : {"MM", "IN"}) {
    ASSERT_TRUE(test::writeIges(test::shapeOf(curves, tilted()), folder.file("a.igs"), unit));
    auto drawing = read(folder.file("a.igs"));
    ASSERT_TRUE(drawing.ok()) << drawing.error().message;
    EXPECT_NEAR(lengthOf(*drawing), 50.0 + 25.0, 1e-6) << unit;
    EXPECT_EQ(*drawing->millimetresPerUnit, 1.0);
  }
}

TEST(StepReading, RefusesWhatIsNotFlatWithItsDeviation) {
  const Folder folder;
  gp_Trsf up;
  up.SetTranslation(gp_Vec(0, 0, 4));
  TopoDS_Compound shape =
      test::shapeOf({curve::Line{{0, 0}, {100, 0}}, curve::Line{{100, 0}, {100, 100}}}, gp_Trsf());
  BRep_Builder().Add(shape, test::edgeOf(curve::Line{{0, 100}, {50, 50}}, up));
  ASSERT_TRUE(test::writeStep(shape, folder.file("a.step"), "a"));
  auto drawing = read(folder.file("a.step"));
  ASSERT_FALSE(drawing.ok());
  EXPECT_EQ(drawing.error().code, ErrorCode::unsupported);
  EXPECT_THAT(drawing.error().message, HasSubstr("is not flat: its 3 edges lie up to "));
}

// Nothing of a file that was cut short is taken for a drawing.
TEST(StepAndIgesSamples, CutAnywhereAreRefused) {
  RunControl control;
  for (const char* name : {"propeller_template.step", "cam_plate.igs"}) {
    const std::string text = fileText(kSamples + name);
    const std::string path = kSamples + name;
    const std::size_t end = text.find_last_not_of(" \r\n") + 1;
    std::size_t cuts = 0;
    for (std::size_t n = 1; n < end; ++n) {
      if (n % 97 != 0 && text[n - 1] != '\n' && end - n > 200) continue;
      ++cuts;
      const auto drawing = readDrawingBytes(std::string_view(text).substr(0, n), path, {}, control);
      ASSERT_FALSE(drawing.ok()) << name << " cut at " << n;
      EXPECT_EQ(drawing.error().code, ErrorCode::cannotRead);
      EXPECT_FALSE(drawing.error().message.empty());
    }
    EXPECT_GT(cuts, 200U);
  }
}

TEST(StepFrame, FindsWhatIsMissing) {
  const auto message = [](const std::string& text) {
    auto result = checkStepFrame(text, "a.step");
    return result.ok() ? std::string("good") : result.error().message;
  };
  const std::string head = "ISO-10303-21;\nHEADER;\nFILE_SCHEMA(('X'));\nENDSEC;\nDATA;\n";
  const std::string tail = "ENDSEC;\nEND-ISO-10303-21;\n";
  EXPECT_EQ(message(head + "#1=A('it''s',#2);\n#2=B($,*,1.5E-3,/* ; */.T.);\n" + tail), "good");
  EXPECT_THAT(message(head + "#1=A(#2);\n" + tail), HasSubstr("line 6: #2 is used but nowhere defined"));
  EXPECT_THAT(message(head + "#1=A();\n#1=A();\n" + tail), HasSubstr("line 7: #1 is defined a second time"));
  EXPECT_THAT(message(head + "#1=A(;\n" + tail), HasSubstr("line 6: a statement ends inside a bracket"));
  EXPECT_THAT(message(head + "#1=A('x);\n" + tail), HasSubstr("line 6: a text that begins here has no end"));
  EXPECT_THAT(message(head + "/* x\n" + tail), HasSubstr("comment"));
  EXPECT_THAT(message("HEADER;\n"), HasSubstr("does not begin"));
  EXPECT_THAT(message(head + tail + "#9=A();"), HasSubstr("something follows"));
  EXPECT_THAT(message("ISO-10303-21;\nHEADER;\nENDSEC;\nEND-ISO-10303-21;\n"), HasSubstr("no DATA section"));
}

TEST(IgesFrame, FindsWhatIsMissing) {
  const std::string text = fileText(kSamples + "cam_plate.igs");
  ASSERT_TRUE(checkIgesFrame(text, "a.igs").ok());
  const auto message = [](const std::string& changed) {
    auto result = checkIgesFrame(changed, "a.igs");
    return result.ok() ? std::string("good") : result.error().message;
  };
  const auto withoutLine = [&text](char section) {
    for (std::size_t at = 0; at < text.size(); at += 81) {
      if (text[at + 72] == section) return text.substr(0, at) + text.substr(at + 81);
    }
    return text;
  };
  EXPECT_THAT(message(withoutLine('D')), HasSubstr("its number is not 1"));
  EXPECT_THAT(message(withoutLine('P')), HasSubstr("its number is not 1"));
  EXPECT_THAT(message(withoutLine('T')), HasSubstr("without the terminate record"));
  std::string counted = text;
  counted[counted.rfind("D") + 7] ^= 1;
  EXPECT_THAT(message(counted), HasSubstr("terminate record does not count"));
  std::string form = text;
  form[72] = 'C';
  EXPECT_THAT(message(form), HasSubstr("compressed form"));
  EXPECT_THAT(message("short line\n"), HasSubstr("10 columns"));
}

TEST(Helper, ThatIsMissingCrashesHangsOrLiesIsAMessage) {
  const Folder folder;
  const std::string text = fileText(kSamples + "propeller_template.step");
  RunControl control;
  BrepOptions brep;
  brep.wallSeconds = 1;
  const auto message = [&](const std::string& helper) {
    const OtherHelper other(helper);
    auto drawing = readBrep(text, "a.step", BrepFormat::step, {}, brep, control);
    return drawing.ok() ? std::string("read") : drawing.error().message;
  };
  EXPECT_THAT(message("/nowhere/brep_reader"), HasSubstr("helper brep_reader is not beside"));
  EXPECT_THAT(message(script(folder, "kill -SEGV $$")), HasSubstr("crashed the STEP reader (signal 11)"));
  EXPECT_THAT(message(script(folder, "exit 3")), HasSubstr("give up (status 3)"));
  EXPECT_THAT(message(script(folder, "exec sleep 60")), HasSubstr("more than 1 s"));
  EXPECT_THAT(message(script(folder, "printf KFBREP01Z")), HasSubstr("answer is damaged"));
  EXPECT_THAT(message(script(folder, "true")), HasSubstr("answer is damaged"));
  brep.maxAnswerBytes = 1000;
  EXPECT_THAT(message(script(folder, "exec cat /dev/zero")), HasSubstr("split the drawing"));
}

TEST(Helper, EndsWhenTheRunIsCancelled) {
  const Folder folder;
  const OtherHelper other(script(folder, "exec sleep 60"));
  RunControl control;
  std::thread later([&control] {
    std::this_thread::sleep_for(std::chrono::milliseconds(100));
    control.cancel();
  });
  auto drawing = readStep(fileText(kSamples + "propeller_template.step"), "a.step", {}, control);
  later.join();
  ASSERT_FALSE(drawing.ok());
  EXPECT_EQ(drawing.error().code, ErrorCode::cancelled);
}

TEST(Helper, StaysWithinItsMemory) {
  RunControl control;
  BrepOptions brep;
  brep.memoryBytes = std::size_t{32} << 20U;  // less than the library itself takes
  auto drawing =
      readBrep(fileText(kSamples + "propeller_template.step"), "a.step", BrepFormat::step, {}, brep, control);
#if !defined(__SANITIZE_ADDRESS__)
  ASSERT_FALSE(drawing.ok());
  EXPECT_EQ(drawing.error().code, ErrorCode::cannotRead);
#endif
}

TEST(Sandbox, ForbidsNetworkProgramsAndFiles) {
  const pid_t child = fork();
  if (child == 0) {
    if (!brep::enterSandbox({})) _exit(10);
    const bool network = socket(AF_INET, SOCK_STREAM, 0) >= 0 || errno != EPERM;
    const std::string name = "/bin/true";
    std::array<char*, 2> arguments = {const_cast<char*>(name.c_str()), nullptr};
    const bool program = execv(name.c_str(), arguments.data()) == 0 || errno != EPERM;
    rlimit files{}, cpu{};
    getrlimit(RLIMIT_FSIZE, &files);
    getrlimit(RLIMIT_CPU, &cpu);
    _exit(network ? 11 : program ? 12 : files.rlim_max != 0 ? 13 : cpu.rlim_max != 60 ? 14 : 0);
  }
  int status = 0;
  waitpid(child, &status, 0);
  EXPECT_TRUE(WIFEXITED(status));
  EXPECT_EQ(WEXITSTATUS(status), 0);
}

// A crash of these libraries must not be able to take the window or the command line with it.
TEST(Programs, DoNotLinkTheStepAndIgesLibraries) {
  const auto linked = [](const std::string& program) {
    std::string text;
    FILE* pipe = popen(("ldd " + program + " 2>&1").c_str(), "r");
    std::array<char, 4096> block{};
    for (std::size_t n = 0; (n = fread(block.data(), 1, block.size(), pipe)) > 0;)
      text.append(block.data(), n);
    pclose(pipe);
    return text;
  };
  const std::string folder = std::string(KF_BINARY_DIR) + "/bin/";
  EXPECT_THAT(linked(folder + "brep_reader"), HasSubstr("libTKSTEP"));
  for (const char* program : {"kfeed", "kappafeed"}) {
    const std::string text = linked(folder + program);
    EXPECT_THAT(text, HasSubstr("libc.so")) << program;
    EXPECT_THAT(text, testing::Not(testing::ContainsRegex("libTK(STEP|IGES|XSBase)"))) << program;
  }
}

}  // namespace
}  // namespace kf::read
