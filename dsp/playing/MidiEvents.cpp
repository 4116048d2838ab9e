#include "dsp/playing/MidiEvents.h"

namespace hitchpin::playing {

using Kind = Event::Kind;

std::optional<Event> eventFromMidi(const std::uint8_t* bytes, int count, int frame) noexcept {
    if (count < 3)
        return std::nullopt;
    const int status = bytes[0] & 0xf0, channel = (bytes[0] & 0x0f) + 1;
    const int first = bytes[1] & 0x7f, second = bytes[2] & 0x7f;
    switch (status) {
    case 0x90:
        if (second > 0)
            return Event{frame, Kind::noteOn, channel, first, static_cast<double>(second)};
        [[fallthrough]];
    case 0x80:
        return Event{frame, Kind::noteOff, channel, first, static_cast<double>(second)};
    case 0xb0:
        if (first == 64)
            return Event{frame, Kind::sustain, channel, 0, static_cast<double>(second)};
        if (first == 120)
            return Event{frame, Kind::allSoundOff, channel, 0, 0.0};
        if (first >= 123)
            return Event{frame, Kind::allNotesOff, channel, 0, 0.0};
        return std::nullopt;
    default:
        return std::nullopt;
    }
}

} // namespace hitchpin::playing
