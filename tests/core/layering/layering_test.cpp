// Who may include whom: the tables of DEVELOPERS.md against the #includes, and what the programs link.
// No units here.
#include <array>
#include <cstdio>
#include <filesystem>
#include <fstream>
#include <map>
#include <regex>
#include <set>
#include <sstream>
#include <string>
#include <vector>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

namespace kf {
namespace {

namespace fs = std::filesystem;
using Rows = std::map<std::string, std::set<std::string>>;
using ::testing::HasSubstr;
using ::testing::IsEmpty;
using ::testing::Not;

const fs::path kTop = KF_SOURCE_DIR;

std::string contentOf(const fs::path& path) {
  std::ifstream file(path, std::ios::binary);
  std::ostringstream text;
  text << file.rdbuf();
  return text.str();
}

// "| `plan` | purpose | path, limits |" under the heading "## Layers of <folder>"; "all above" is every row
// so far.
Rows tableOf(const std::string& folder) {
  const std::string document = contentOf(kTop / "DEVELOPERS.md");
  const std::size_t begin = document.find("## Layers of " + folder);
  if (begin == std::string::npos) return {};
  std::istringstream lines(document.substr(begin, document.find("\n## ", begin + 3) - begin));
  static const std::regex row(R"(^\| `([a-z_]+)` \|[^|]*\| ([^|]*) \|$)"), word("[a-z_]+");
  Rows rows;
  for (std::string line; std::getline(lines, line);) {
    std::smatch cells;
    if (!std::regex_match(line, cells, row)) continue;
    const std::string allowed = cells[2];
    std::set<std::string> names{cells[1], "base"};
    if (allowed.find("all above") != std::string::npos) {
      for (const auto& [name, unused] : rows) names.insert(name);
    } else {
      for (std::sregex_iterator it(allowed.begin(), allowed.end(), word), end; it != end; ++it)
        names.insert(it->str());
    }
    rows[cells[1]] = std::move(names);
  }
  return rows;
}

struct Include {
  fs::path file;
  std::string what;  // with its quotes or brackets
};

std::vector<Include> includesUnder(const fs::path& folder) {
  static const std::regex line(R"(^\s*#\s*include\s*([<"][^>"]+[>"]))");
  std::vector<Include> found;
  if (!fs::exists(folder)) return found;
  for (const auto& entry : fs::recursive_directory_iterator(folder)) {
    const std::string ending = entry.path().extension();
    if (ending != ".h" && ending != ".cpp") continue;
    std::istringstream lines(contentOf(entry.path()));
    std::smatch match;
    for (std::string text; std::getline(lines, text);) {
      if (std::regex_search(text, match, line))
        found.push_back({entry.path().lexically_relative(kTop), match[1]});
    }
  }
  return found;
}

// "core/plan/plan.h" in quotes -> {"core", "plan"}; anything else is none of ours.
std::pair<std::string, std::string> moduleOf(const std::string& include) {
  static const std::regex path(R"re("(core|ui|app)/([a-z_]+)/.*")re");
  std::smatch match;
  if (!std::regex_match(include, match, path)) return {};
  return {match[1], match[2]};
}

// Every include of `folder` that its table does not allow, one text each.
std::vector<std::string> offences(const std::string& folder, const Rows& rows) {
  std::vector<std::string> list;
  for (const Include& include : includesUnder(kTop / folder)) {
    const auto [top, module] = moduleOf(include.what);
    const std::string own =
        include.file.begin() == include.file.end() ? "" : std::next(include.file.begin())->string();
    const std::string said = include.file.string() + " includes " + include.what;
    if (include.what.front() == '"' && top.empty())
      list.push_back(said + ", which is not a path from the top");
    if (top == "app" || (folder == "core" && top == "ui")) list.push_back(said);
    if (top != folder) continue;
    const auto row = rows.find(own);
    if (row == rows.end() || row->second.count(module) == 0) list.push_back(said);
  }
  return list;
}

std::string outputOf(const std::string& command) {
  std::string text;
  FILE* pipe = popen(command.c_str(), "r");
  if (pipe == nullptr) return text;
  std::array<char, 4096> block{};
  while (const std::size_t n = fread(block.data(), 1, block.size(), pipe)) text.append(block.data(), n);
  return pclose(pipe) == 0 ? text : "";
}

TEST(Layers, OfTheCoreAreThoseOfTheTable) {
  const Rows rows = tableOf("core");
  ASSERT_GE(rows.size(), 15U);
  EXPECT_THAT(offences("core", rows), IsEmpty());
}

TEST(Layers, OfTheWindowAreThoseOfTheTable) {
  const Rows rows = tableOf("ui");
  ASSERT_GE(rows.size(), 10U);
  EXPECT_THAT(offences("ui", rows), IsEmpty());
}

TEST(Layers, EveryFolderHasARowAndEveryRowComesAfterWhatItUses) {
  for (const std::string folder : {"core", "ui"}) {
    const Rows rows = tableOf(folder);
    for (const auto& entry : fs::directory_iterator(kTop / folder)) {
      if (!entry.is_directory()) continue;
      EXPECT_EQ(rows.count(entry.path().filename()), 1U) << entry.path();
    }
    for (const auto& [name, allowed] : rows) {
      for (const std::string& other : allowed) {
        if (other == name || other == "base") continue;
        ASSERT_EQ(rows.count(other), 1U) << name << " may use " << other << ", which has no row";
        EXPECT_EQ(rows.at(other).count(name), 0U) << name << " and " << other << " use each other";
      }
    }
  }
}

TEST(Layers, TheCoreKnowsNoQt) {
  static const std::regex qt(R"([<"](Q[A-Z][A-Za-z]*|Qt[A-Z].*|qcustomplot\.h)[>"])");
  for (const Include& include : includesUnder(kTop / "core"))
    EXPECT_FALSE(std::regex_match(include.what, qt)) << include.file << " includes " << include.what;
}

TEST(Layers, TheAuditNeverSeesThePlanner) {
  const Rows rows = tableOf("core");
  EXPECT_EQ(rows.at("audit").count("plan"), 0U);
}

TEST(Layers, APlantedOffenceIsFound) {
  Rows rows = tableOf("core");
  rows["plan"].erase("path");
  EXPECT_THAT(offences("core", rows), Not(IsEmpty()));
}

TEST(Programs, LinkNoStepOrIgesReaderAndTheCommandLineLinksNoQt) {
  const fs::path bin = fs::path(KF_BINARY_DIR) / "bin";
  const std::string line = outputOf("ldd '" + (bin / "kfeed").string() + "'");
  ASSERT_THAT(line, HasSubstr("libc"));
  for (const char* library : {"TKSTEP", "TKIGES", "TKXSBase", "libQt"})
    EXPECT_THAT(line, Not(HasSubstr(library)));
  if (!fs::exists(bin / "kappafeed")) return;  // a build of the command line alone
  const std::string window = outputOf("ldd '" + (bin / "kappafeed").string() + "'");
  ASSERT_THAT(window, HasSubstr("libQt6Widgets"));
  for (const char* library : {"TKSTEP", "TKIGES", "TKXSBase"}) EXPECT_THAT(window, Not(HasSubstr(library)));
}

}  // namespace
}  // namespace kf
