// Seeded damage to STEP and IGES files: each ends in a drawing or a message, and this program lives on.
// Lengths in mm.
#include <cstdio>
#include <fstream>
#include <map>
#include <random>
#include <sstream>
#include <string>

#include <gtest/gtest.h>

#include "core/read/brep_client.h"

namespace kf::read {
namespace {

std::string fileText(const std::string& name) {
  std::ifstream file(std::string(KF_SOURCE_DIR) + "/samples/" + name, std::ios::binary);
  std::stringstream text;
  text << file.rdbuf();
  return text.str();
}

bool isDigit(char c) {
  return c >= '0' && c <= '9';
}

// Where a whole number of the content begins, not the number of an instance nor one of an IGES line: changing
// it leaves the frame whole, so that the damage reaches the libraries. `text.size()` when luck fails.
std::size_t innerNumber(const std::string& text, bool iges, std::mt19937_64& random) {
  for (int tries = 0; tries < 200; ++tries) {
    std::size_t at = random() % text.size();
    if (!isDigit(text[at])) continue;
    while (at > 0 && isDigit(text[at - 1])) --at;
    const bool framed =
        iges ? at % 81 >= 64 || text[at - at % 81 + 72] != 'P' : at > 0 && text[at - 1] == '#';
    if (!framed) return at;
  }
  return text.size();
}

// A reference to an instance, past its #.
std::size_t reference(const std::string& text, std::mt19937_64& random) {
  const std::size_t at = text.find('#', random() % text.size());
  return at == std::string::npos || at + 2 > text.size() ? text.size() : at + 1;
}

std::size_t digitsFrom(const std::string& text, std::size_t at) {
  std::size_t n = 0;
  while (at + n < text.size() && isDigit(text[at + n])) ++n;
  return n;
}

void damageOnce(std::string& text, bool iges, std::mt19937_64& random) {
  const std::size_t at = random() % text.size();
  switch (random() % 12) {
    case 0:
      text[at] = static_cast<char>(random());
      return;
    case 1:
      text[at] = "(),;#'$*.-+E"[random() % 12];
      return;
    case 2:
      text.erase(at, 1 + random() % 40);
      return;
    case 3:
      text.insert(at, text.substr(random() % text.size(), 1 + random() % 40));
      return;
    case 4:
    case 5:
    case 6: {  // one instance in place of another
      if (iges) break;
      const std::size_t a = reference(text, random), b = reference(text, random);
      const std::size_t n = digitsFrom(text, a), m = digitsFrom(text, b);
      if (n > 0 && m > 0 && text.substr(a + n, 2) != " =") text.replace(a, n, text.substr(b, m));
      return;
    }
    default:
      break;
  }
  const std::size_t number = innerNumber(text, iges, random);
  const std::size_t n = digitsFrom(text, number);
  for (std::size_t i = 0; i < n; ++i) text[number + i] = static_cast<char>('0' + random() % 10);
}

std::string damaged(std::string text, bool iges, std::mt19937_64& random) {
  const std::size_t changes = 1 + random() % 3;
  for (std::size_t i = 0; i < changes; ++i) damageOnce(text, iges, random);
  return text;
}

void damageMany(const std::string& name, BrepFormat format, std::uint64_t seed) {
  const std::string whole = fileText(name);
  ASSERT_FALSE(whole.empty());
  std::mt19937_64 random(seed);
  std::map<std::string, int> outcomes;
  BrepOptions brep;
  brep.cpuSeconds = 2;
  brep.wallSeconds = 10;
  for (int i = 0; i < 2000; ++i) {
    RunControl control;
    const auto drawing =
        readBrep(damaged(whole, format == BrepFormat::iges, random), name, format, {}, brep, control);
    if (drawing.ok()) {
      ++outcomes["read"];
      continue;
    }
    const std::string& text = drawing.error().message;
    ASSERT_EQ(text.find(name), 0U) << "seed " << seed << ", file " << i << ": " << text;
    ASSERT_GT(text.size(), name.size() + 10);
    const bool crashed = text.find("crashed") != std::string::npos,
               slow = text.find("took") != std::string::npos;
    ++outcomes[crashed                              ? "crashed the helper"
               : slow                               ? "timed out"
               : text.find(" line ") == name.size() ? "refused by its frame"
                                                    : "refused"];
  }
  for (const auto& [outcome, times] : outcomes)
    std::printf("%s: %d %s\n", name.c_str(), times, outcome.c_str());
}

TEST(DamagedStep, EndsInADrawingOrAMessage) {
  damageMany("propeller_template.step", BrepFormat::step, 20240501);
}
TEST(DamagedIges, EndsInADrawingOrAMessage) {
  damageMany("cam_plate.igs", BrepFormat::iges, 20240502);
}

}  // namespace
}  // namespace kf::read
