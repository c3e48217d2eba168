// The crash-safe writer: whole files, untouched old ones, and clear refusals.
// No units here.
#include "core/write/file_writer.h"

#include <sys/resource.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <chrono>
#include <csignal>
#include <filesystem>
#include <fstream>
#include <random>
#include <sstream>
#include <thread>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

namespace kf::write {
namespace {

namespace fs = std::filesystem;
using ::testing::ElementsAre;
using ::testing::HasSubstr;
using ::testing::IsEmpty;

class Writing : public ::testing::Test {
 protected:
  void SetUp() override {
    std::string name = (fs::temp_directory_path() / "kf-write-XXXXXX").string();
    ASSERT_NE(mkdtemp(name.data()), nullptr);
    folder_ = name;
  }
  void TearDown() override { fs::remove_all(folder_); }

  std::string at(const std::string& name) const { return (folder_ / name).string(); }
  void put(const std::string& name, const std::string& content) const { std::ofstream(at(name)) << content; }
  std::string content(const std::string& name) const {
    std::ostringstream text;
    text << std::ifstream(at(name), std::ios::binary).rdbuf();
    return text.str();
  }
  std::vector<std::string> names() const {
    std::vector<std::string> list;
    for (const auto& entry : fs::directory_iterator(folder_)) list.push_back(entry.path().filename());
    std::sort(list.begin(), list.end());
    return list;
  }

  fs::path folder_;
};

TEST_F(Writing, PutsTheContentInPlaceAndLeavesNothingElse) {
  const std::string big(3'000'000, 'x');
  ASSERT_TRUE(writeFile(at("a.csv"), big, false));
  EXPECT_EQ(content("a.csv"), big);
  EXPECT_THAT(names(), ElementsAre("a.csv"));
}

TEST_F(Writing, KeepsAnExistingFileUnlessForced) {
  put("a.csv", "old");
  const auto refused = writeFile(at("a.csv"), "new", false);
  ASSERT_FALSE(refused);
  EXPECT_EQ(refused.error().code, ErrorCode::cannotWrite);
  EXPECT_THAT(refused.error().message, HasSubstr("--force"));
  EXPECT_EQ(content("a.csv"), "old");
  ASSERT_TRUE(writeFile(at("a.csv"), "new", true));
  EXPECT_EQ(content("a.csv"), "new");
  EXPECT_THAT(names(), ElementsAre("a.csv"));
}

TEST_F(Writing, KeepsThePermissionsOfTheFileThatItReplaces) {
  put("a.csv", "old");
  ASSERT_EQ(chmod(at("a.csv").c_str(), 0640), 0);
  ASSERT_TRUE(writeFile(at("a.csv"), "new", true));
  struct stat found {};
  ASSERT_EQ(stat(at("a.csv").c_str(), &found), 0);
  EXPECT_EQ(found.st_mode & 0777U, 0640U);
}

TEST_F(Writing, ReplacesWhatALinkPointsTo) {
  put("real.csv", "old");
  fs::create_symlink("real.csv", folder_ / "link.csv");
  ASSERT_TRUE(writeFile(at("link.csv"), "new", true));
  EXPECT_TRUE(fs::is_symlink(folder_ / "link.csv"));
  EXPECT_EQ(content("real.csv"), "new");
}

TEST_F(Writing, RefusesPlacesWhereNothingCanBeMade) {
  put("file", "content");
  for (const std::string& place :
       {at("file/under.csv"), at("missing/a.csv"), at("."), std::string("/proc/a.csv"), std::string("")}) {
    const auto refused = writeFile(place, "new", true);
    ASSERT_FALSE(refused) << place;
    EXPECT_EQ(refused.error().code, ErrorCode::cannotWrite) << place;
  }
  EXPECT_THAT(names(), ElementsAre("file"));
  EXPECT_EQ(content("file"), "content");
}

TEST_F(Writing, SaysWhenADeviceIsFull) {
  const auto refused = writeFile("/dev/full", "new", true);
  ASSERT_FALSE(refused);
  EXPECT_THAT(refused.error().message, HasSubstr("No space left"));
}

// The limit on a file's size stands in for a disk that fills: write() fails part-way.
TEST_F(Writing, LeavesTheOldFileWhenTheDiskFills) {
  put("a.csv", "old");
  const pid_t child = fork();
  if (child == 0) {
    std::signal(SIGXFSZ, SIG_IGN);
    const rlimit small{100'000, 100'000};
    setrlimit(RLIMIT_FSIZE, &small);
    const auto refused = writeFile(at("a.csv"), std::string(1'000'000, 'x'), true);
    _exit(!refused && refused.error().code == ErrorCode::cannotWrite ? 0 : 1);
  }
  int status = 1;
  ASSERT_EQ(waitpid(child, &status, 0), child);
  EXPECT_EQ(status, 0);
  EXPECT_EQ(content("a.csv"), "old");
  EXPECT_THAT(names(), ElementsAre("a.csv"));
}

TEST_F(Writing, LeavesOldOrNewAndNothingBetweenWhenKilled) {
  constexpr unsigned kSeed = 20261201;
  std::mt19937 random(kSeed);
  const std::string old(400'000, 'o'), fresh(400'000, 'n');
  put("a.csv", old);
  for (int round = 0; round < 100; ++round) {
    const pid_t child = fork();
    if (child == 0) {
      for (int i = 0; i < 1000; ++i) {
        if (!writeFile(at("a.csv"), i % 2 == 0 ? fresh : old, true)) _exit(1);
      }
      _exit(0);
    }
    std::this_thread::sleep_for(std::chrono::microseconds(random() % 8000));
    kill(child, SIGKILL);
    waitpid(child, nullptr, 0);
    const std::string found = content("a.csv");
    ASSERT_TRUE(found == old || found == fresh) << "round " << round << ", seed " << kSeed;
  }
}

TEST_F(Writing, PutsAllOutputsInPlaceOrNone) {
  put("kept.json", "old");
  {
    Outputs outputs;
    ASSERT_TRUE(outputs.add(at("a.csv"), "points", false));
    EXPECT_FALSE(outputs.add(at("kept.json"), "summary", false));
  }
  EXPECT_THAT(names(), ElementsAre("kept.json"));
  {
    Outputs outputs;
    ASSERT_TRUE(outputs.add(at("a.csv"), "points", false));
    EXPECT_THAT(names(), ::testing::Not(::testing::Contains("a.csv"))) << "before commit";
    ASSERT_TRUE(outputs.add("/dev/full", "summary", false));
    EXPECT_FALSE(outputs.commit());
  }
  EXPECT_THAT(names(), ElementsAre("kept.json"));
  Outputs outputs;
  ASSERT_TRUE(outputs.add(at("a.csv"), "points", false));
  ASSERT_TRUE(outputs.add(at("kept.json"), "summary", true));
  ASSERT_TRUE(outputs.commit());
  EXPECT_EQ(content("a.csv"), "points");
  EXPECT_EQ(content("kept.json"), "summary");
  EXPECT_THAT(names(), ElementsAre("a.csv", "kept.json"));
}

TEST_F(Writing, TakesBackNewFilesWhenALaterOneAppearedInTheMeantime) {
  {
    Outputs outputs;
    ASSERT_TRUE(outputs.add(at("a.csv"), "points", false));
    ASSERT_TRUE(outputs.add(at("b.json"), "summary", false));
    put("b.json", "somebody else's");
    EXPECT_FALSE(outputs.commit());
  }
  EXPECT_THAT(names(), ElementsAre("b.json"));
  EXPECT_EQ(content("b.json"), "somebody else's");
}

TEST_F(Writing, RefusesTwoOutputsAtOnePlace) {
  Outputs outputs;
  ASSERT_TRUE(outputs.add(at("a.csv"), "points", false));
  const auto refused = outputs.add(at("./a.csv"), "summary", false);
  ASSERT_FALSE(refused);
  EXPECT_THAT(refused.error().message, HasSubstr("same place"));
}

}  // namespace
}  // namespace kf::write
