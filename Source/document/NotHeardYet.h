// What a file may say and the sound does not follow yet.
#pragma once

#include "Source/document/Instrument.h"

namespace hitchpin::document {

/// A sentence for each, in the order of the file's keys.
std::vector<std::string> notHeardYet(const Instrument&);

} // namespace hitchpin::document
