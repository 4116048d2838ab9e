#include "Source/document/NotHeardYet.h"

#include "Source/document/Field.h"

#include <algorithm>

namespace hitchpin::document {

namespace {

template <class R>
bool isSaid(const R& record, const char* key) {
    const auto& fields = table<R>().fields;
    const auto row = std::find_if(fields.begin(), fields.end(), [&](const auto& f) { return f.key == key; });
    return isSaid(record, static_cast<std::size_t>(row - fields.begin()));
}

} // namespace

std::vector<std::string> notHeardYet(const Instrument& instrument) {
    std::vector<std::string> said;
    const auto beyondRings = std::count_if(instrument.courses.begin(), instrument.courses.end(), [](const auto& c) {
        return c.beyondMm.rings || std::any_of(c.each.begin(), c.each.end(), [](const auto& e) { return e.beyondMm.rings; });
    });
    if (beyondRings > 0)
        said.push_back("beyond_mm.rings: the lengths beyond nut and bridge stay silent (" + std::to_string(beyondRings) +
                       (beyondRings == 1 ? " course)." : " courses)."));
    const auto& playing = instrument.playing;
    switch (playing.with) {
    case With::finger:
    case With::plectrum: break;
    case With::felt:
        said.push_back("playing.with \"felt\": hammers; the strings are plucked by a finger at the strike point.");
        break;
    case With::tangent:
        said.push_back("playing.with \"tangent\": the strings are plucked by a finger at the strike point.");
        break;
    case With::bow: said.push_back("playing.with \"bow\": the strings are plucked by a finger at the pluck point."); break;
    }
    if (playing.heightMm)
        said.push_back("playing.height_mm string by string: every string is drawn with the force that draws the middle "
                       "course so far.");
    if (playing.softnessMmN > 0)
        said.push_back("playing.softness_mm_n: finger and plectrum let go at once.");
    if (isSaid(playing, "bend_semitones"))
        said.push_back("playing.bend_semitones: the pitch wheel.");
    if (!playing.hammers.empty() && playing.with != With::felt)
        said.push_back("playing.hammers: hammers strike where playing.with is \"felt\".");
    if (isSaid(playing, "tangent") && playing.with != With::tangent)
        said.push_back("playing.tangent: the measures of a tangent.");
    if (isSaid(playing, "bow") && playing.with != With::bow)
        said.push_back("playing.bow: the measures of a bow.");
    const bool unlike = std::any_of(instrument.courses.begin(), instrument.courses.end(),
                                    [](const auto& c) { return !c.each.empty(); });
    if (playing.notes == Notes::everyKeyStrung && unlike)
        said.push_back("each, in courses added between others: their strings are alike.");
    return said;
}

} // namespace hitchpin::document
