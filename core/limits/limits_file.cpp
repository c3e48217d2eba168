// The limits file: strict reading, and writing.
// Units as the file's keys say.
#include <algorithm>
#include <fstream>
#include <iostream>
#include <set>
#include <sstream>

#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include "core/limits/limits.h"
#include "core/limits/nearest.h"

namespace kf::limits {
namespace {

using Json = nlohmann::ordered_json;

constexpr std::string_view kFormat = "kappafeed-limits";
constexpr int kVersion = 1;
constexpr std::size_t kLargestFile = 1U << 20;

Error refused(std::string_view source, std::string message) {
  return {ErrorCode::cannotRead, fmt::format("{}: {}", source, message)};
}

// Parses, and refuses keys that stand twice in one object: the later would silently win.
Result<Json> parseStrict(std::string_view text, std::string_view source) {
  std::vector<std::set<std::string>> seen;
  std::string twice;
  const auto watch = [&](int /*depth*/, Json::parse_event_t event, Json& parsed) {
    if (event == Json::parse_event_t::object_start) seen.emplace_back();
    if (event == Json::parse_event_t::object_end && !seen.empty()) seen.pop_back();
    if (event == Json::parse_event_t::key && !seen.empty() &&
        !seen.back().insert(parsed.get<std::string>()).second && twice.empty()) {
      twice = parsed.get<std::string>();
    }
    return true;
  };
  try {
    Json json = Json::parse(text, watch);
    if (!twice.empty()) return refused(source, fmt::format("the key '{}' stands twice; remove one", twice));
    return json;
  } catch (const Json::exception& e) {
    return refused(source, fmt::format("is not valid JSON ({}); correct it there", e.what()));
  }
}

// The known names one level below `prefix` ("" or "axes." or "axes.X.").
std::vector<std::string> childrenOf(std::string_view prefix) {
  std::vector<std::string> children;
  std::vector<std::string> all;
  for (const Field& field : fields()) all.emplace_back(field.name);
  all.emplace_back("tool.side");
  all.emplace_back("path.feed_at");
  if (prefix.empty()) all.insert(all.end(), {"format", "version", "name", "example"});
  for (const std::string& name : all) {
    if (name.compare(0, prefix.size(), prefix) != 0) continue;
    std::string child = name.substr(prefix.size(), name.find('.', prefix.size()) - prefix.size());
    if (std::find(children.begin(), children.end(), child) == children.end())
      children.push_back(std::move(child));
  }
  return children;
}

class Reader {
 public:
  Reader(std::string_view source, Limits& limits) : source_(source), limits_(limits) {}

  Result<void> object(const Json& json, const std::string& prefix) {
    const std::vector<std::string> known = childrenOf(prefix);
    for (const auto& [key, value] : json.items()) {
      if (std::find(known.begin(), known.end(), key) == known.end()) {
        const std::vector<std::string_view> views(known.begin(), known.end());
        return refused(source_, fmt::format("unknown key '{}{}'; the nearest known one is '{}{}'", prefix,
                                            key, prefix, nearest(key, views)));
      }
      if (auto done = entry(prefix + key, value); !done) return done;
    }
    return {};
  }

 private:
  Result<void> entry(const std::string& name, const Json& value) {
    if (name == "format" || name == "version") return {};  // checked before
    if (name == "name") {
      if (!value.is_string()) return refused(source_, "'name' must be text");
      limits_.name = value.get<std::string>();
      return {};
    }
    if (name == "example") {
      if (!value.is_boolean()) return refused(source_, "'example' must be true or false");
      limits_.example = value.get<bool>();
      return {};
    }
    if (name == "tool.side") {
      const auto side = value.is_string() ? sideFromText(value.get<std::string>()) : std::nullopt;
      if (!side)
        return refused(
            source_, fmt::format("'tool.side' must be \"on\", \"left\" or \"right\", not {}", value.dump()));
      limits_.side = *side;
      return {};
    }
    if (name == "path.feed_at") {
      if (value != "wall" && value != "centre")
        return refused(source_,
                       fmt::format("'path.feed_at' must be \"centre\" or \"wall\", not {}", value.dump()));
      limits_.feedAtWall = value == "wall";
      return {};
    }
    if (const Field* field = findField(name)) return number(*field, value);
    if (value.is_null()) return {};
    if (!value.is_object())
      return refused(source_, fmt::format("'{}' must be an object in braces, not {}", name, value.dump()));
    return object(value, name + ".");
  }

  Result<void> number(const Field& field, const Json& value) {
    if (value.is_null()) return {};
    if (!value.is_number())
      return refused(source_, fmt::format("'{}' must be a number or null, not {}", field.name, value.dump()));
    const double v = value.get<double>();
    if (auto checked = checkValue(field, v); !checked) return refused(source_, checked.error().message);
    field.put(limits_, v);
    return {};
  }

  std::string_view source_;
  Limits& limits_;
};

Result<Limits> interpret(const Json& json, std::string_view source) {
  if (!json.is_object()) return refused(source, "must hold one JSON object in braces");
  const auto format = json.find("format");
  if (format == json.end() || *format != kFormat) {
    return refused(source, fmt::format("is not a limits file; it must say \"format\": \"{}\"", kFormat));
  }
  const auto version = json.find("version");
  if (version == json.end() || !version->is_number_integer() || *version < 1) {
    return refused(source, fmt::format("must say \"version\": {}", kVersion));
  }
  if (*version > kVersion) {
    return refused(
        source,
        fmt::format("has version {}, newer than {}, the newest that this program knows; use a newer program",
                    version->dump(), kVersion));
  }
  Limits limits;
  if (auto read = Reader(source, limits).object(json, ""); !read) return read.error();
  return limits;
}

}  // namespace

Result<Limits> parseLimits(std::string_view json, std::string_view source) {
  auto parsed = parseStrict(json, source);
  if (!parsed) return parsed.error();
  try {
    return interpret(*parsed, source);
  } catch (const std::exception& e) {  // text that is not UTF-8 can't be quoted in a message
    return refused(source, fmt::format("can't be read ({})", e.what()));
  }
}

Result<Limits> readLimitsFile(const std::string& path) {
  const std::string source = path == "-" ? "standard input" : path;
  std::ifstream file;
  if (path != "-") file.open(path, std::ios::binary);
  std::istream& in = path == "-" ? std::cin : file;
  if (!in) return refused(source, "can't be opened; check the name and that it may be read");
  std::string text(kLargestFile + 1, '\0');
  in.read(text.data(), static_cast<std::streamsize>(text.size()));
  if (in.bad() || (in.gcount() == 0 && !in.eof())) return refused(source, "can't be read");
  text.resize(static_cast<std::size_t>(in.gcount()));
  if (text.size() > kLargestFile) return refused(source, "is larger than 1 MiB and no limits file");
  return parseLimits(text, source);
}

std::string toJson(const Limits& limits) {
  Json json;
  json["format"] = kFormat;
  json["version"] = kVersion;
  json["name"] = limits.name;
  if (limits.example) json["example"] = true;
  for (const Field& field : fields()) {
    Json* target = &json;
    std::string_view rest = field.name;
    for (std::size_t dot = rest.find('.'); dot != std::string_view::npos; dot = rest.find('.')) {
      target = &(*target)[std::string(rest.substr(0, dot))];
      rest.remove_prefix(dot + 1);
    }
    const std::optional<double> value = field.get(limits);
    Json& place = (*target)[std::string(rest)];
    if (!value) {
      place = nullptr;
    } else if (field.integer) {
      place = static_cast<long long>(*value);
    } else {
      place = *value;
    }
  }
  json["path"]["feed_at"] = limits.feedAtWall ? "wall" : "centre";
  json["tool"]["side"] = toText(limits.side);
  return json.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

}  // namespace kf::limits
