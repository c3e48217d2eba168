// Seeded damage to SVG: each ends in a drawing of finite curves or a message. Meaningful above all under the
// sanitizers. Lengths in the page's unit.
#include <cstdio>
#include <fstream>
#include <random>
#include <sstream>
#include <string>

#include <gtest/gtest.h>

#include "core/read/drawing.h"

namespace kf::read {
namespace {

std::string fileText(const std::string& name) {
  std::ifstream file(std::string(KF_SOURCE_DIR) + "/samples/" + name, std::ios::binary);
  std::stringstream text;
  text << file.rdbuf();
  return text.str();
}

std::string damaged(std::string text, std::mt19937_64& random) {
  const std::size_t changes = 1 + random() % 5;
  for (std::size_t i = 0; i < changes; ++i) {
    const std::size_t at = random() % text.size();
    switch (random() % 6) {
      case 0:
        text[at] = static_cast<char>(random());
        break;
      case 1:
        text[at] = "<>/\"'=;:{}()#%.,-+eE019 "[random() % 24];
        break;
      case 2:
        text.erase(at, 1 + random() % 20);
        break;
      case 3:
        text.insert(at, text.substr(random() % text.size(), 1 + random() % 60));
        break;
      case 4:
        text.insert(at, "1e308");
        break;
      default:
        text[at] = "MmLlHhVvCcSsQqTtAaZz"[random() % 20];
        break;
    }
  }
  return text;
}

TEST(DamagedSvg, EndsInADrawingOrAMessage) {
  const std::string whole = fileText("name_board.svg");
  ASSERT_FALSE(whole.empty());
  std::mt19937_64 random(20240503);
  std::size_t readWhole = 0, partly = 0, refused = 0;
  for (int i = 0; i < 20'000; ++i) {
    RunControl control;
    const auto drawing = readSvg(damaged(whole, random), "name_board.svg", {}, control);
    if (!drawing) {
      ++refused;
      ASSERT_EQ(drawing.error().message.find("name_board.svg"), 0U) << i;
      continue;
    }
    ++(drawing->skipped.empty() ? readWhole : partly);
    for (const auto& loose : drawing->curves) {
      const curve::Box box = loose.curve.bounds();
      ASSERT_TRUE(isFinite(box.low) && isFinite(box.high)) << i;
    }
  }
  std::printf("%zu read whole, %zu with something left out, %zu refused\n", readWhole, partly, refused);
  EXPECT_GT(partly, 0U);
  EXPECT_GT(refused, 0U);
}

}  // namespace
}  // namespace kf::read
