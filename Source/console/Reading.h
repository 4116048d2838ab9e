// From the file named on the command line to what it describes, with every problem said.
#pragma once

#include "Source/console/Command.h"
#include "Source/document/Document.h"
#include "dsp/design/MakeLoop.h"

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

/// `--quality`, reference where it is not given; `--note`, which must be given. Failures say what they must be.
Result<design::Quality> qualityFrom(const Arguments&);
Result<int> keyFrom(const Arguments&);
/// That no course of the instrument sounds the key of `--note`.
void sayOutOfReach(const Arguments&);

/// Says on stderr what the file asks for and the sound does not follow yet.
void sayNotHeardYet(const document::Described&);

} // namespace hitchpin::console
