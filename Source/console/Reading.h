// From the file named on the command line to what it describes, with every problem said.
#pragma once

#include "Source/document/Document.h"

#include <optional>
#include <string>

namespace hitchpin::console {

struct Read {
    document::Instrument instrument;
    document::Described described;
};

/// Says each problem on stderr and returns nothing when there is any.
std::optional<Read> readInstrument(const std::string& path, int partialCount = string::defaultPartialCount);

/// As the shell names it, relative to where the program was called.
juce::File fileNamed(const std::string& path);

/// Says on stderr what the file asks for and the sound does not follow yet.
void sayNotHeardYet(const document::Described&);

} // namespace hitchpin::console
