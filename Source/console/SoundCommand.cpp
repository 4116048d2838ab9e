#include "Source/console/AudioFile.h"
#include "Source/console/Command.h"
#include "Source/console/LongWork.h"
#include "Source/console/Reading.h"
#include "dsp/playing/MidiEvents.h"
#include "dsp/playing/Player.h"

#include <algorithm>
#include <cmath>
#include <optional>

namespace hitchpin::console {

namespace {

using playing::Event;

constexpr double mezzoforte = 80.0;   // MIDI velocity of an audition
constexpr double scaleStep = 0.6;     // s from note to note of a scale
constexpr double ringOn = 4.0;        // s after the last event, unless it is silent before
constexpr double longest = 3600.0;    // s

/// What is to be played: events on their sample, and when the sound is over.
struct Score {
    struct Timed {
        double seconds;
        Event event;
    };
    std::vector<Timed> events;
    double seconds = 0.0;
    bool untilSilent = false; ///< may end before, when nothing sounds any more
};

Event press(int key) { return {0, Event::Kind::noteOn, 1, key, mezzoforte}; }
Event lift(int key) { return {0, Event::Kind::noteOff, 1, key, 0.0}; }

Score oneNote(int key, std::optional<double> seconds) { return {{{0.0, press(key)}}, seconds.value_or(ringOn), false}; }

/// Every course's open note in turn, rising; a key is held until the next but one.
Score scale(const design::InstrumentDescription& instrument, std::optional<double> seconds) {
    std::vector<int> keys;
    for (const auto& course : instrument.courses)
        keys.push_back(course.key);
    std::sort(keys.begin(), keys.end());
    keys.erase(std::unique(keys.begin(), keys.end()), keys.end());
    const double step = seconds ? *seconds / static_cast<double>(keys.size() + 3) : scaleStep;
    Score score;
    for (std::size_t i = 0; i < keys.size(); ++i) {
        const double start = step * static_cast<double>(i);
        score.events.push_back({start, press(keys[i])});
        score.events.push_back({start + 2.0 * step, lift(keys[i])});
    }
    std::stable_sort(score.events.begin(), score.events.end(),
                     [](const auto& a, const auto& b) { return a.seconds < b.seconds; });
    score.seconds = seconds.value_or(step * static_cast<double>(keys.size()) + ringOn);
    return score;
}

Result<Score> fromMidi(const std::string& path, std::optional<double> seconds) {
    const auto file = fileNamed(path);
    juce::FileInputStream stream(file);
    if (file.isDirectory() || stream.failedToOpen())
        return Failure{path + ": cannot be opened"};
    juce::MidiFile midi;
    if (!midi.readFrom(stream))
        return Failure{path + ": is not a Standard MIDI File"};
    midi.convertTimestampTicksToSeconds();
    juce::MidiMessageSequence all;
    for (int track = 0; track < midi.getNumTracks(); ++track)
        all.addSequence(*midi.getTrack(track), 0.0);
    all.sort();
    Score score;
    for (const auto* holder : all) {
        const auto& message = holder->message;
        if (const auto event = playing::eventFromMidi(message.getRawData(), message.getRawDataSize(), 0))
            score.events.push_back({message.getTimeStamp(), *event});
    }
    if (score.events.empty())
        return Failure{path + ": holds no notes"};
    const double end = score.events.back().seconds + ringOn;
    if (!std::isfinite(end) || end > longest)
        return Failure{path + ": is longer than an hour"};
    score.seconds = seconds.value_or(end);
    score.untilSilent = !seconds;
    return score;
}

juce::Result render(const juce::File& out, const AudioFileFormat& format, const Score& score, playing::Player& player,
                    Written& written) {
    const auto total = static_cast<std::int64_t>(std::llround(score.seconds * format.sampleRate));
    const double lastEvent = score.events.back().seconds * format.sampleRate;
    std::int64_t done = 0;
    std::size_t next = 0;
    std::vector<Event> events;
    std::vector<double> left, right;
    LongWork work("playing");
    const Source source = [&](float* leftOut, float* rightOut, int frames) {
        if (!work.goOn(static_cast<double>(done) / static_cast<double>(std::max<std::int64_t>(total, 1))))
            return -1;
        const auto count = static_cast<int>(std::min<std::int64_t>(frames, total - done));
        if (count <= 0 || (score.untilSilent && static_cast<double>(done) > lastEvent && player.silent()))
            return 0;
        events.clear();
        for (; next < score.events.size(); ++next) {
            const auto frame = std::llround(score.events[next].seconds * format.sampleRate) - done;
            if (frame >= count)
                break;
            events.push_back(score.events[next].event);
            events.back().frame = static_cast<int>(std::max<std::int64_t>(frame, 0));
        }
        left.resize(static_cast<std::size_t>(count));
        right.resize(static_cast<std::size_t>(count));
        player.process(events, left.data(), right.data(), count);
        for (int i = 0; i < count; ++i) {
            leftOut[i] = static_cast<float>(left[static_cast<std::size_t>(i)] / playing::fullScaleNewtons);
            rightOut[i] = static_cast<float>(right[static_cast<std::size_t>(i)] / playing::fullScaleNewtons);
        }
        done += count;
        return count;
    };
    return writeAudio(out, format, source, written);
}

std::string inWords(const AudioFileFormat& format) {
    return std::to_string(static_cast<int>(format.sampleRate)) + " Hz, " + std::to_string(format.bits) + "-bit " +
           (format.flac ? "FLAC" : format.bits == 32 ? "floating-point WAV" : "WAV");
}

Exit run(const Arguments& arguments) {
    const auto& command = soundCommand();
    const auto out = arguments.text("--out");
    if (!out)
        return wrongCall(command, "--out F is needed: where the sound goes");
    const bool flac = juce::String(*out).endsWithIgnoreCase(".flac");
    if (!flac && !juce::String(*out).endsWithIgnoreCase(".wav"))
        return wrongCall(command, "--out = " + *out + ": must end in .wav or .flac");
    if (arguments.has("--note") + arguments.has("--scale") + arguments.has("--midi") != 1)
        return wrongCall(command, "one of --note N, --scale and --midi F says what is played");
    const auto rate = arguments.number("--rate", 48000.0, 8000.0, 192000.0, "Hz");
    const auto bits = arguments.number("--bits", flac ? 24.0 : 32.0, 16.0, 32.0, "");
    const auto seconds = arguments.number("--seconds", 0.0, 0.01, longest, "s");
    for (const auto* number : {&rate, &bits, &seconds})
        if (!*number)
            return wrongCall(command, number->error().message);
    if (*bits != 16.0 && *bits != 24.0 && (*bits != 32.0 || flac))
        return wrongCall(command, "--bits = " + *arguments.text("--bits") +
                                      (flac ? ": must be 16 or 24 in FLAC" : ": must be 16, 24 or 32"));
    if (*rate != std::floor(*rate))
        return wrongCall(command, "--rate = " + *arguments.text("--rate") + ": must be a whole number of Hz");
    const auto quality = qualityFrom(arguments);
    if (!quality)
        return wrongCall(command, quality.error().message);
    std::optional<int> key;
    if (arguments.has("--note")) {
        const auto named = keyFrom(arguments);
        if (!named)
            return wrongCall(command, named.error().message);
        key = *named;
    }

    const auto read = readInstrument(arguments.file());
    if (!read)
        return failed;
    sayNotHeardYet(read->described);
    const std::optional<double> length = arguments.has("--seconds") ? std::optional(*seconds) : std::nullopt;
    Result<Score> score = key                        ? Result<Score>(oneNote(*key, length))
                          : arguments.has("--scale") ? Result<Score>(scale(read->described.instrument, length))
                                                     : fromMidi(*arguments.text("--midi"), length);
    if (!score) {
        say(score.error().message);
        return failed;
    }

    const AudioFileFormat format{*rate, static_cast<int>(*bits), flac};
    const design::LoopSettings settings{format.sampleRate, *quality};
    auto design = [&] {
        LongWork work("designing");
        return design::makeInstrument(read->described.instrument, settings,
                                      [&](double share) { return work.goOn(share); });
    }();
    if (!design) {
        say(LongWork::interrupted() ? "stopped: nothing is written" : design.error().message);
        return failed;
    }
    playing::Player player(*design, read->described.rules);
    if (key && player.keyState(*key) == playing::KeyState::silent) {
        sayOutOfReach(arguments);
        return failed;
    }
    Written written;
    const auto result = render(fileNamed(*out), format, *score, player, written);
    if (result.failed()) {
        say(LongWork::interrupted() ? "stopped: nothing is written" : result.getErrorMessage().toStdString());
        return failed;
    }
    const auto decibels = written.peak > 0.0 ? juce::String(20.0 * std::log10(written.peak), 1) : juce::String("-inf");
    say(*out + ": " + juce::String(static_cast<double>(written.frames) / format.sampleRate, 2).toStdString() + " s, " +
        inWords(format) + ", peak " + juce::String(written.peak * playing::fullScaleNewtons, 2).toStdString() + " N (" +
        decibels.toStdString() + " dB; full scale is " + std::to_string(juce::roundToInt(playing::fullScaleNewtons)) +
        " N of force at the bridge)");
    if (written.clipped > 0)
        say(format.bits == 32
                ? "the peak is over full scale: nothing is lost in this format, but turn it down before playing it"
                : std::to_string(written.clipped) + " samples over full scale are cut off: --bits 32 keeps them");
    return well;
}

} // namespace

const Command& soundCommand() {
    static const Command command{
        "sound",
        "FILE --out F.wav|F.flac (--note A3 | --scale | --midi F.mid) [--seconds S] [--rate R] [--bits 16|24|32] "
        "[--quality live|reference]",
        "Writes what the strings sound like, at a physical level and without a limiter.",
        {{"--out", "F", "where the sound goes: .wav or .flac"},
         {"--note", "N", "one note, as A3"},
         {"--scale", "", "every course in turn"},
         {"--midi", "F", "a Standard MIDI File"},
         {"--seconds", "S", "length of the sound"},
         {"--rate", "R", "sample rate in Hz, 48000 by default"},
         {"--bits", "B", "16, 24, or 32 for floating point (the default of WAV)"},
         {"--quality", "Q", "reference (the default: as many filters as a string needs) or live"}},
        true,
        run};
    return command;
}

} // namespace hitchpin::console
