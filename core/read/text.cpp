// Small tools for reading text.
// No units here.
#include "core/read/text.h"

#include <algorithm>
#include <array>

#include <iconv.h>

#include <fmt/format.h>

namespace kf::read {
namespace {

bool isUtf8(std::string_view bytes) {
  for (std::size_t i = 0; i < bytes.size();) {
    const auto c = static_cast<unsigned char>(bytes[i]);
    std::size_t more = 0;
    if (c < 0x80) {
      more = 0;
    } else if (c >= 0xC2 && c <= 0xDF) {
      more = 1;
    } else if (c >= 0xE0 && c <= 0xEF) {
      more = 2;
    } else if (c >= 0xF0 && c <= 0xF4) {
      more = 3;
    } else {
      return false;
    }
    if (i + more >= bytes.size() && more > 0) return false;
    for (std::size_t j = 1; j <= more; ++j) {
      if ((static_cast<unsigned char>(bytes[i + j]) & 0xC0U) != 0x80U) return false;
    }
    i += more + 1;
  }
  return true;
}

void appendUtf8(std::string& out, unsigned code) {
  if (code < 0x80) {
    out += static_cast<char>(code);
  } else if (code < 0x800) {
    out += static_cast<char>(0xC0U | (code >> 6U));
    out += static_cast<char>(0x80U | (code & 0x3FU));
  } else {
    out += static_cast<char>(0xE0U | (code >> 12U));
    out += static_cast<char>(0x80U | ((code >> 6U) & 0x3FU));
    out += static_cast<char>(0x80U | (code & 0x3FU));
  }
}

// Windows-1252 differs from Latin-1 only here. Source: the WHATWG encoding standard.
constexpr std::array<unsigned, 32> kWindows1252 = {
    0x20AC, 0x81,   0x201A, 0x0192, 0x201E, 0x2026, 0x2020, 0x2021, 0x02C6, 0x2030, 0x0160,
    0x2039, 0x0152, 0x8D,   0x017D, 0x8F,   0x90,   0x2018, 0x2019, 0x201C, 0x201D, 0x2022,
    0x2013, 0x2014, 0x02DC, 0x2122, 0x0161, 0x203A, 0x0153, 0x9D,   0x017E, 0x0178};

constexpr std::size_t kMostRows = 1000;

// "ANSI_1251" -> "CP1251", "DOS850" -> "CP850", "ISO8859-2" as it is.
std::string iconvName(std::string_view codePage) {
  const std::string name = lowerCase(trimmed(codePage));
  const std::size_t digits = name.find_first_of("0123456789");
  if (digits == std::string::npos || name.substr(0, 3) == "iso") return name;
  const std::string number = name.substr(digits);
  if (number == "949") return "UHC";
  if (number == "950") return "BIG5";
  if (number == "1361") return "JOHAB";
  return "CP" + number;
}

std::optional<std::string> byCodePage(std::string_view bytes, std::string_view codePage) {
  if (codePage.empty() || codePage.size() > 40) return std::nullopt;
  const iconv_t converter = iconv_open("UTF-8", iconvName(codePage).c_str());
  if (converter == reinterpret_cast<iconv_t>(-1)) return std::nullopt;  // what iconv_open returns on failure
  std::string in(bytes), out(4 * bytes.size() + 16, '\0');
  char *from = in.data(), *to = out.data();
  std::size_t left = in.size(), room = out.size();
  const bool ok = iconv(converter, &from, &left, &to, &room) != static_cast<std::size_t>(-1) && left == 0;
  iconv_close(converter);
  if (!ok) return std::nullopt;
  out.resize(out.size() - room);
  return out;
}

// \U+00E9 stands for one character of the basic plane. Source: the public DXF reference.
std::string withoutEscapes(std::string text) {
  std::size_t at = text.find("\\U+");
  while (at != std::string::npos) {
    unsigned code = 0;
    const char* first = text.data() + at + 3;
    const char* last = text.data() + std::min(at + 7, text.size());
    const auto [end, failure] = std::from_chars(first, last, code, 16);
    const bool surrogate = code >= 0xD800 && code < 0xE000;
    if (failure == std::errc() && end == first + 4 && code >= 0x20 && !surrogate) {
      std::string one;
      appendUtf8(one, code);
      text.replace(at, 7, one);
    }
    at = text.find("\\U+", at + 1);
  }
  return text;
}

}  // namespace

std::string lowerCase(std::string_view text) {
  std::string lower(text);
  for (char& c : lower) {
    if (c >= 'A' && c <= 'Z') c = static_cast<char>(c + 32);
  }
  return lower;
}

std::string decoded(std::string_view bytes, std::string_view codePage) {
  if (isUtf8(bytes)) return withoutEscapes(std::string(bytes));
  if (auto text = byCodePage(bytes, codePage)) return withoutEscapes(std::move(*text));
  return withoutEscapes(toUtf8(bytes));
}

std::string_view trimmed(std::string_view text) {
  while (!text.empty() && (text.front() == ' ' || text.front() == '\t' || text.front() == '\r'))
    text.remove_prefix(1);
  while (!text.empty() && (text.back() == ' ' || text.back() == '\t' || text.back() == '\r'))
    text.remove_suffix(1);
  return text;
}

std::optional<double> parseNumber(std::string_view text) {
  text = trimmed(text);
  if (!text.empty() && text.front() == '+') text.remove_prefix(1);
  double value = 0.0;
  const auto [end, failure] = std::from_chars(text.data(), text.data() + text.size(), value);
  if (failure == std::errc::result_out_of_range && end == text.data() + text.size()) {
    // Underflow is zero; overflow is no number.
    const bool tiny = text.find("e-") != std::string_view::npos || text.find("E-") != std::string_view::npos;
    return tiny ? std::optional<double>(0.0) : std::nullopt;
  }
  if (failure != std::errc() || end != text.data() + text.size() || !std::isfinite(value))
    return std::nullopt;
  return value;
}

std::optional<long long> parseInteger(std::string_view text) {
  text = trimmed(text);
  if (!text.empty() && text.front() == '+') text.remove_prefix(1);
  long long value = 0;
  const auto [end, failure] = std::from_chars(text.data(), text.data() + text.size(), value);
  if (failure != std::errc() || end != text.data() + text.size()) return std::nullopt;
  return value;
}

std::string toUtf8(std::string_view bytes) {
  if (isUtf8(bytes)) return std::string(bytes);
  std::string out;
  for (char byte : bytes) {
    const auto c = static_cast<unsigned char>(byte);
    appendUtf8(out, c >= 0x80 && c < 0xA0 ? kWindows1252[c - 0x80] : c);
  }
  return out;
}

void note(std::vector<Skipped>& list, std::string_view kind, std::string_view reason,
          std::string_view place) {
  const auto same = [&](const Skipped& row) { return row.kind == kind && row.reason == reason; };
  const auto row = std::find_if(list.begin(), list.end(), same);
  if (row != list.end()) {
    ++row->count;
  } else if (list.size() >= kMostRows && kind != "other") {
    note(list, "other", "further kinds and reasons", place);
  } else {
    list.push_back({std::string(kind), std::string(reason), 1, std::string(place)});
  }
}

std::string describe(const std::vector<Skipped>& list) {
  std::string text;
  for (const Skipped& row : list) {
    if (!text.empty()) text += ", ";
    text += fmt::format("{} {} ({}, first at {})", row.count, row.kind, row.reason, row.firstPlace);
  }
  return text;
}

}  // namespace kf::read
