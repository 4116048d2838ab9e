// What a single field's range cannot say: names that must be known, keys that exclude or need each other.
#pragma once

#include "Source/document/Document.h"

namespace hitchpin::document {

/// Every broken rule. Values that are missing are not mentioned again.
Problems brokenRules(const Instrument&);

/// The note of a course in an instrument whose rules hold, or none where the pitch is given otherwise.
std::optional<int> noteOf(const Course&);

/// One string of a course: the course with what `each` says differently.
Course stringOf(const Course&, std::size_t string);

} // namespace hitchpin::document
