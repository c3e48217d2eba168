// Damaged, cut and hostile input: refused with a reason or read whole, never half, and nothing crashes.
// Lengths in drawing units.
#include <algorithm>
#include <clocale>
#include <cmath>
#include <filesystem>
#include <locale>
#include <random>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "core/contour/chain.h"
#include "core/read/drawing.h"
#include "tests/core/read/dxf_text.h"

namespace kf::read {
namespace {

namespace fs = std::filesystem;
using ::testing::HasSubstr;

const fs::path kSamples = fs::path(KF_SOURCE_DIR) / "samples";

// STEP and IGES go through a helper process and have tests of their own.
std::vector<fs::path> samples() {
  std::vector<fs::path> found;
  for (const auto& entry : fs::directory_iterator(kSamples)) {
    const std::string ending = entry.path().extension().string();
    if (ending == ".dxf" || ending == ".csv" || ending == ".svg") found.push_back(entry.path());
  }
  std::sort(found.begin(), found.end());
  return found;
}

std::string bytesOf(const fs::path& path) {
  auto bytes = readBytes(path.string(), std::size_t{1} << 30);
  EXPECT_TRUE(bytes);
  return bytes ? std::move(*bytes) : std::string();
}

Result<Drawing> readAs(std::string_view bytes, const fs::path& path) {
  RunControl control;
  return readDrawingBytes(bytes, path.string(), {}, control);
}

// Small samples are cut at every line; of large ones, whose many lines are alike, 400 seeded lines are tried,
// and the first and last 200.
TEST(Samples, CutAtALineAreRefused) {
  std::size_t tried = 0;
  for (const fs::path& path : samples()) {
    const std::string bytes = bytesOf(path);
    ASSERT_TRUE(readAs(bytes, path)) << path << ": " << readAs(bytes, path).error().message;
    std::vector<std::size_t> cuts;
    for (std::size_t at = bytes.find('\n'); at + 1 < bytes.size(); at = bytes.find('\n', at + 1))
      cuts.push_back(at + 1);
    std::mt19937_64 random(7);
    if (cuts.size() > 6000) {
      std::vector<std::size_t> some(cuts.begin(), cuts.begin() + 200);
      some.insert(some.end(), cuts.end() - 200, cuts.end());
      for (int i = 0; i < 400; ++i) some.push_back(cuts[random() % cuts.size()]);
      cuts = some;
    }
    for (std::size_t cut : cuts) {
      const auto drawing = readAs(std::string_view(bytes).substr(0, cut), path);
      EXPECT_FALSE(drawing) << path << " cut at byte " << cut;
      if (drawing) break;
      EXPECT_FALSE(drawing.error().message.empty());
      ++tried;
    }
  }
  EXPECT_GT(tried, 5000U);
}

TEST(Samples, CutAtAnyNinetySeventhByteAreRefused) {
  for (const fs::path& path : samples()) {
    const std::string bytes = bytesOf(path);
    const std::size_t step = bytes.size() > 200'000 ? 97 * 41 : 97;
    // Without its last line end a DXF file is whole.
    for (std::size_t cut = step; cut + 5 < bytes.size(); cut += step)
      EXPECT_FALSE(readAs(std::string_view(bytes).substr(0, cut), path)) << path << " cut at byte " << cut;
  }
}

// What was read must at least be chainable: finite, without NaN.
void readAndChain(const std::string& bytes, const fs::path& path, std::size_t& accepted) {
  const auto drawing = readAs(bytes, path);
  if (!drawing) {
    EXPECT_FALSE(drawing.error().message.empty());
    return;
  }
  ++accepted;
  if (drawing->curves.size() > 300) return;
  RunControl control;
  const auto chained = contour::chain(drawing->curves, {}, control);
  if (!chained) {
    EXPECT_FALSE(chained.error().message.empty());
    return;
  }
  for (const auto& c : chained->contours) EXPECT_TRUE(std::isfinite(contour::length(c)));
}

TEST(Mutations, OfSamplesNeverCrash) {
  constexpr unsigned kSeed = 4711;
  SCOPED_TRACE(kSeed);
  std::mt19937_64 random(kSeed);
  const char* nasty[] = {"0",      "-1",      "nan", "1e308", "-1e308", "2147483647", "99999999999999999999",
                         "1e-320", "SECTION", "EOF", "",      "INSERT", "SEQEND",     "\xFF\xFE"};
  std::size_t accepted = 0, tried = 0;
  for (const fs::path& path : samples()) {
    const std::string whole = bytesOf(path);
    if (whole.size() > 200'000) continue;  // its lines are alike; the others hold every kind of entity
    for (int i = 0; i < 600; ++i, ++tried) {
      std::string bytes = whole;
      for (std::size_t n = 1 + random() % 4; n > 0; --n) {
        const std::size_t at = random() % bytes.size();
        switch (random() % 5) {
          case 0:
            bytes[at] = static_cast<char>(random());
            break;
          case 1:
            bytes.erase(at, 1 + random() % 40);
            break;
          case 2:
            bytes.insert(at, bytes.substr(random() % bytes.size(), random() % 200));
            break;
          default: {  // another value in place of one line
            const std::size_t begin = bytes.rfind('\n', at) + 1;
            const std::size_t end = std::min(bytes.find('\n', at), bytes.size());
            if (begin <= end) bytes.replace(begin, end - begin, nasty[random() % std::size(nasty)]);
          }
        }
        if (bytes.empty()) bytes = "0";
      }
      readAndChain(bytes, path, accepted);
    }
  }
  EXPECT_GE(tried, 4000U);
  EXPECT_GT(accepted, 0U);  // else the mutations would test the first line only
}

TEST(BinaryDxf, CutAtAnyByteIsRefusedAndMutationsNeverCrash) {
  // A circle and a line, in the form with two-byte group codes. Source: the public DXF reference.
  std::string bytes("AutoCAD Binary DXF\r\n\x1a\0", 22);
  const auto code = [&](int c) {
    bytes += static_cast<char>(c & 255);
    bytes += static_cast<char>(c >> 8);
  };
  const auto text = [&](int c, std::string_view value) {
    code(c);
    bytes += value;
    bytes += '\0';
  };
  const auto real = [&](int c, double value) {
    code(c);
    bytes.append(reinterpret_cast<const char*>(&value), sizeof value);  // a little-endian machine runs this
  };
  text(0, "SECTION");
  text(2, "ENTITIES");
  text(0, "CIRCLE");
  text(8, "cut");
  code(310);
  bytes.append("\x02\0\0", 3);  // a chunk with its size
  real(10, 1.5);
  real(20, -2.0);
  real(40, 3.0);
  text(0, "ENDSEC");
  text(0, "EOF");
  const auto drawing = readAs(bytes, "a.dxf");
  ASSERT_TRUE(drawing) << drawing.error().message;
  ASSERT_EQ(drawing->curves.size(), 1U);
  EXPECT_EQ(drawing->format, "binary DXF");
  EXPECT_EQ(drawing->curves[0].curve.asArc()->radius, 3.0);
  EXPECT_EQ(drawing->curves[0].curve.asArc()->centre, (curve::Vec2{1.5, -2.0}));
  for (std::size_t cut = 0; cut < bytes.size(); ++cut)
    EXPECT_FALSE(readAs(std::string_view(bytes).substr(0, cut), "a.dxf")) << cut;
  std::mt19937_64 random(99);
  std::size_t accepted = 0;
  for (int i = 0; i < 3000; ++i) {
    std::string bad = bytes;
    for (std::size_t n = 1 + random() % 3; n > 0; --n)
      bad[22 + random() % (bad.size() - 22)] = static_cast<char>(random());
    readAndChain(bad, "a.dxf", accepted);
  }
}

TEST(OtherInput, IsRefusedInOneSentence) {
  const auto refusal = [](std::string_view bytes, const char* name) {
    const auto drawing = readAs(bytes, name);
    return drawing ? std::string("accepted") : drawing.error().message;
  };
  EXPECT_THAT(refusal("", "a.dxf"), HasSubstr("a.dxf is empty"));
  EXPECT_THAT(refusal(" \r\n\n", "a.csv"), HasSubstr("is empty"));
  EXPECT_THAT(refusal(std::string_view("\0\1\2\3\n\0", 6), "a.dxf"), HasSubstr("not a DXF group code"));
  EXPECT_THAT(refusal("\x89PNG\r\n\x1a\n", "picture.png"), HasSubstr("of a kind that is not read"));
  RunControl control;
  const auto folder = readDrawing(kSamples.string(), {}, control);
  ASSERT_FALSE(folder);
  EXPECT_THAT(folder.error().message, HasSubstr("is a folder"));
  const auto missing = readDrawing("nowhere.dxf", {}, control);
  ASSERT_FALSE(missing);
  EXPECT_THAT(missing.error().message, HasSubstr("can't be opened"));
}

TEST(HugeCounts, AreNotBelieved) {
  const auto drawing =
      readAs(dxf("0 LWPOLYLINE 90 2147483647 70 0 10 0 20 0 10 1 20 0 0 SPLINE 70 0 71 1 72 2000000000 "
                 "73 2000000000 74 2000000000 40 0 40 0 40 1 40 1 10 0 20 0 10 1 20 1"),
             "a.dxf");
  ASSERT_TRUE(drawing) << drawing.error().message;
  EXPECT_EQ(drawing->curves.size(), 2U);
}

TEST(ManyOddKinds, AreReportedInABoundedTable) {
  std::string entities = "0 LINE 10 0 20 0 11 1 21 0";
  for (int i = 0; i < 20'000; ++i) entities += " 0 KIND" + std::to_string(i);
  const auto drawing = readAs(dxf(entities), "a.dxf");
  ASSERT_TRUE(drawing);
  EXPECT_LE(drawing->skipped.size(), 1001U);
  std::size_t count = 0;
  for (const Skipped& row : drawing->skipped) count += row.count;
  EXPECT_EQ(count, 20'000U);
}

struct DecimalComma : std::numpunct<char> {
  char do_decimal_point() const override { return ','; }
};

// The C++ locale always; the C one too where a locale with a decimal comma is installed.
TEST(Locale, WithADecimalCommaChangesNothing) {
  const std::string before = std::setlocale(LC_ALL, nullptr);
  const std::locale old = std::locale::global(std::locale(std::locale::classic(), new DecimalComma));
  const bool found =
      std::setlocale(LC_ALL, "de_DE.UTF-8") != nullptr || std::setlocale(LC_ALL, "fr_FR.UTF-8") != nullptr;
  const auto drawing = readAs(dxf("0 LINE 10 1.5 20 2.5 11 4.25 21 0.125"), "a.dxf");
  const auto points = readAs("1.5,2.5\n4.25,0.125\n", "a.csv");
  std::locale::global(old);
  std::setlocale(LC_ALL, before.c_str());
  RecordProperty("c_locale_with_comma", found ? "yes" : "none installed");
  for (const auto* one : {&drawing, &points}) {
    ASSERT_TRUE(*one) << one->error().message;
    EXPECT_EQ((*one)->curves[0].curve.asLine()->a, (curve::Vec2{1.5, 2.5}));
    EXPECT_EQ((*one)->curves[0].curve.asLine()->b, (curve::Vec2{4.25, 0.125}));
  }
}

TEST(Cancelling, StopsReading) {
  std::string entities;
  for (int i = 0; i < 3000; ++i) entities += " 0 LINE 10 0 20 0 11 1 21 " + std::to_string(i);
  RunControl control;
  control.cancel();
  const auto drawing = readDrawingBytes(dxf(entities.substr(1)), "a.dxf", {}, control);
  ASSERT_FALSE(drawing);
  EXPECT_EQ(drawing.error().code, ErrorCode::cancelled);
}

}  // namespace
}  // namespace kf::read
