// From MIDI bytes to what a player understands.
#pragma once

#include "dsp/playing/Player.h"

#include <cstdint>
#include <optional>

namespace hitchpin::playing {

/// nullopt for what is not played: clocks, system exclusive, controllers without a meaning here.
/// A note on with velocity 0 is a note off (MIDI 1.0). Controllers: 64 sustain, 120 all sound off, 123 all notes
/// off, and 124…127 as 123 (MIDI 1.0: mode messages also act as all notes off). No heap: works on raw bytes.
std::optional<Event> eventFromMidi(const std::uint8_t* bytes, int count, int frame) noexcept;

} // namespace hitchpin::playing
