// What the field table tells people: every key, and which defaults a file leaves standing.
#pragma once

#include "Source/document/Instrument.h"

#include <string>
#include <vector>

namespace hitchpin::document {

/// Every key of the file with what it may be, its default and its meaning, a line each, records under headings.
std::vector<std::string> keyReference();

/// "courses[].cents = 0 (26 of 26)": keys that the file left out and that therefore have their default.
std::vector<std::string> defaultsTaken(const Instrument&);

} // namespace hitchpin::document
