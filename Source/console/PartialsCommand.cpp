#include "Source/console/AllPartials.h"
#include "Source/console/Command.h"
#include "Source/console/LongWork.h"
#include "Source/console/PartialsTable.h"
#include "Source/console/Reading.h"
#include "dsp/analysis/Measure.h"
#include "dsp/engine/Engine.h"
#include "dsp/playing/Player.h"

#include <cmath>
#include <iostream>
#include <numbers>

namespace hitchpin::console {

namespace {

constexpr double highestHz = 10000.0;
constexpr int mostPartials = 120;
constexpr double shortest = 2.0, longest = 12.0; // s of sound
/// What falls by 60 dB within so few periods has no pitch to measure.
constexpr double fewestPeriods = 30.0;

/// The course that a key takes: the highest open one at or below it within its frets.
const design::CourseDescription* courseFor(const design::InstrumentDescription& instrument, int key) {
    const design::CourseDescription* best = nullptr;
    for (const auto& course : instrument.courses)
        if (playing::keyStateOf(key, course.key, course.frets) != playing::KeyState::silent && (best == nullptr || course.key > best->key))
            best = &course;
    return best;
}

/// That string alone on a rigid bridge.
design::InstrumentDescription alone(const design::CourseDescription& course, string::Strung string) {
    design::InstrumentDescription instrument;
    instrument.boards.emplace_back();
    instrument.bridges.emplace_back();
    design::CourseDescription one;
    one.name = course.name;
    one.key = course.key;
    one.pluckRatio = pluckedAt;
    one.strings = {std::move(string)};
    instrument.courses = {std::move(one)};
    return instrument;
}

Exit run(const Arguments& arguments) {
    const auto& command = partialsCommand();
    if (arguments.has("--note") + arguments.has("--all") != 1)
        return wrongCall(command, "one of --note N and --all is needed: which strings");
    const auto quality = qualityFrom(arguments);
    if (!quality)
        return wrongCall(command, quality.error().message);
    if (arguments.has("--all")) {
        const auto read = readInstrument(arguments.file());
        return read ? printAllPartials(read->described.instrument, *quality) : failed;
    }
    const auto key = keyFrom(arguments);
    if (!key)
        return wrongCall(command, key.error().message);
    const auto read = readInstrument(arguments.file());
    if (!read)
        return failed;
    const auto* course = courseFor(read->described.instrument, *key);
    if (course == nullptr) {
        sayOutOfReach(arguments);
        return failed;
    }
    auto string = string::stoppedAt(course->strings.front(), std::exp2((course->key - *key) / 12.0));
    if (!string) {
        say(string.error().message);
        return failed;
    }
    const auto partials = string->partials;
    std::vector<double> expected;
    for (int n = 1; n <= mostPartials && (n == 1 || partials.frequency(n) <= highestHz); ++n)
        expected.push_back(partials.frequency(n));

    const auto design = design::makeInstrument(alone(*course, std::move(string).value()), {sampleRate, *quality});
    if (!design) {
        say(design.error().message);
        return failed;
    }
    engine::Engine engine(*design);
    engine.pluck(0, {1.0, pluckedAt, 0.0, std::numbers::pi / 2.0});
    std::vector<double> sound(
        static_cast<std::size_t>(sampleRate * std::clamp(partials.t60(1), shortest, longest)));
    engine.process(sound.data(), nullptr, static_cast<int>(sound.size()));
    const auto measured = analysis::measurePartials(sound, sampleRate, expected);

    const auto& report = (*design)->strings[0].stops[0].loop.accuracy;
    std::cout << course->name << (course->key < *key ? " stopped at fret " + std::to_string(*key - course->key) : "")
              << ", one string alone between its ends, " << (*quality == design::Quality::live ? "live" : "reference") << " quality, "
              << (*design)->strings[0].stops[0].loop.sections.size() << " allpass sections\n"
              << "B = " << juce::String(partials.inharmonicity(), 3, true) << ", F0 = "
              << juce::String(partials.harmonicF0(), 3) << " Hz; made to be true up to "
              << juce::roundToInt(report.coverageHz) << " Hz (partial " << report.coveragePartial << ")\n\n"
              << "        predicted      measured     off   over n f1   ring time T60, s\n"
              << "   n           Hz            Hz    cent        cent  predicted   measured\n";
    double worstCents = 0.0, worstT60 = 0.0;
    int worstAt = 0, notFound = 0;
    for (std::size_t i = 0; i < expected.size(); ++i) {
        const int n = static_cast<int>(i) + 1;
        std::cout << juce::String(n).paddedLeft(' ', 4) << column(expected[i], 3, 13);
        if (measured[i].frequency <= 0.0 || expected[i] * partials.t60(n) < fewestPeriods) {
            std::cout << "  dies too soon or lies too high to be measured\n";
            ++notFound;
            continue;
        }
        const double off = analysis::centsBetween(measured[i].frequency, expected[i]);
        const double sharp = analysis::centsBetween(expected[i], n * expected[0]);
        std::cout << column(measured[i].frequency, 3, 14) << column(off, 3, 8) << column(sharp, 2, 12)
                  << column(partials.t60(n), 3, 11) << column(measured[i].t60, 3, 11) << "\n";
        if (n <= report.coveragePartial) {
            if (std::abs(off) > std::abs(worstCents)) {
                worstCents = off;
                worstAt = n;
            }
            if (expected[i] <= 6000.0)
                worstT60 = std::max(worstT60, std::abs(measured[i].t60 / partials.t60(n) - 1.0));
        }
    }
    std::cout << "\nWorst within that range: " << juce::String(worstCents, 4) << " cent (partial " << worstAt
              << "), ring time " << juce::String(100.0 * worstT60, 2) << " % up to 6 kHz.";
    if (notFound > 0)
        std::cout << " Not measured: " << notFound << ".";
    std::cout << "\n";
    return well;
}

} // namespace

const Command& partialsCommand() {
    static const Command command{
        "partials",
        "FILE --note A3 | --all [--quality live|reference]",
        "Prints partials, predicted beside measured from the sound: of one string, or of the whole instrument.",
        {{"--note", "N", "which string: the note it sounds, as A3, alone between its ends"},
         {"--all", "", "all strings on their boards: every coupled partial below 5 kHz"},
         {"--quality", "Q", "reference (the default) or live"}},
        true,
        run};
    return command;
}

} // namespace hitchpin::console
