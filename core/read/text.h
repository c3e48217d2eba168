// Small tools for reading text: lines, numbers, encodings; and the table of what was left out.
// No units here.
#pragma once

#include <charconv>
#include <cmath>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "core/read/drawing.h"

namespace kf::read {

std::string_view trimmed(std::string_view text);

// The whole of `text` (blanks around it and a leading + allowed) as a finite number with a decimal point.
std::optional<double> parseNumber(std::string_view text);
std::optional<long long> parseInteger(std::string_view text);

// `bytes` when they are UTF-8, else read as Windows-1252.
std::string toUtf8(std::string_view bytes);

// `bytes` as text: UTF-8 when they are that, else by the code page that a drawing names ("ANSI_1251"), else
// as Windows-1252. Escapes of the form \U+00E9 are resolved.
std::string decoded(std::string_view bytes, std::string_view codePage);

// Capital ASCII letters made small; other bytes as they are.
std::string lowerCase(std::string_view text);

// Adds one entity to the row of its kind and reason. Past a thousand rows, kinds count as "other".
void note(std::vector<Skipped>& list, std::string_view kind, std::string_view reason, std::string_view place);

// "3 HATCH (reason), 1 TEXT (reason)"
std::string describe(const std::vector<Skipped>& list);

}  // namespace kf::read
