// The known word nearest to a mistyped one.
// No units here.
#include "core/limits/nearest.h"

#include <algorithm>
#include <cstddef>
#include <numeric>

namespace kf::limits {
namespace {

// What it costs to turn `a` into `b`. People leave endings such as units out more often than they mistype, so
// adding a character costs less than changing or dropping one.
constexpr std::size_t kAdd = 1, kChange = 3;

std::size_t editDistance(std::string_view a, std::string_view b) {
  std::vector<std::size_t> row(b.size() + 1);
  std::iota(row.begin(), row.end(), std::size_t{0});
  for (std::size_t i = 0; i < a.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = (i + 1) * kChange;
    for (std::size_t j = 0; j < b.size(); ++j) {
      const std::size_t replaced = diagonal + (a[i] == b[j] ? 0 : kChange);
      diagonal = row[j + 1];
      row[j + 1] = std::min({replaced, row[j] + kAdd, row[j + 1] + kChange});
    }
  }
  return row.back();
}

}  // namespace

std::string nearest(std::string_view word, const std::vector<std::string_view>& known) {
  word = word.substr(0, 200);
  std::string best;
  std::size_t least = static_cast<std::size_t>(-1);
  for (std::string_view candidate : known) {
    const std::size_t d = editDistance(word, candidate);
    if (d < least) {
      least = d;
      best = candidate;
    }
  }
  return best;
}

}  // namespace kf::limits
