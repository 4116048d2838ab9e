#include "Source/console/AllPartials.h"

#include "Source/console/LongWork.h"
#include "Source/console/PartialsTable.h"
#include "dsp/analysis/CheckPoles.h"
#include "dsp/analysis/Measure.h"
#include "dsp/design/CoupledPoles.h"
#include "dsp/engine/Engine.h"

#include <juce_core/juce_core.h>

#include <algorithm>
#include <cmath>
#include <iostream>
#include <numbers>

namespace hitchpin::console {

namespace {

constexpr double highestHz = 5000.0;
constexpr double listenedFor = 5.0; // s
/// Plucked in a direction of its own each, so that no two sound alike.
constexpr double angleStep = 0.37;
/// Poles a little higher sound too, and have to be known for those at the border.
constexpr double beyondHz = 200.0;
/// The check: together the predicted partials leave no more of any band's energy unexplained, dB…
constexpr double mostUnexplained = -80.0;
/// …and each that can be told from its neighbours agrees so well. Told apart: its own error is this much smaller.
constexpr double mostCents = 0.05, mostDecay = 0.01, surely = 30.0;

std::string whose(const design::InstrumentDescription& instrument, const design::InstrumentDesign& design,
                  const design::CoupledPole& pole, const board::Board& board) {
    if (pole.string < 0)
        return "board " + juce::String(board.modes[static_cast<std::size_t>(pole.partial)].frequency, 0).toStdString() + " Hz";
    const auto course = static_cast<std::size_t>(design.strings[static_cast<std::size_t>(pole.string)].course);
    return instrument.courses[course].name + " partial " + std::to_string(pole.partial);
}

struct Tally {
    int poles = 0, measured = 0, still = 0, tooNear = 0, notSettled = 0, off = 0;
    double worstCents = 0.0, worstDecay = 0.0, worstUnexplained = -400.0;
};

/// What sounds after all strings of the board were plucked, from where the plucks have ended.
std::vector<double> soundOf(const std::shared_ptr<const design::InstrumentDesign>& design, int board) {
    engine::Engine engine(design);
    double longest = 0.0;
    for (std::size_t i = 0; i < design->strings.size(); ++i) {
        const auto& string = design->strings[i];
        if (string.board != board)
            continue;
        engine.pluck(static_cast<int>(i), {1.0, pluckedAt, 0.0, 0.5 + angleStep * static_cast<double>(i)});
        longest = std::max(longest, 1.0 / string.stops.front().loop.firstPartialHz);
    }
    std::vector<double> sound(static_cast<std::size_t>(sampleRate * listenedFor));
    // Plucks send for some round trips.
    std::vector<double> before(static_cast<std::size_t>(sampleRate * 12.0 * longest) + 64);
    engine.process(before.data(), nullptr, static_cast<int>(before.size()));
    engine.process(sound.data(), nullptr, static_cast<int>(sound.size()));
    return sound;
}

/// bridge "one"; or with several on the board: bridges "one", "other" on one board
std::string bridgesOf(const design::InstrumentDescription& instrument, int board) {
    std::string names;
    int count = 0;
    for (const auto& bridge : instrument.bridges)
        if (bridge.board == board)
            names += (count++ > 0 ? ", \"" : "\"") + bridge.name + "\"";
    return count > 1 ? "bridges " + names + " on one board" : "bridge " + names;
}

void printBoard(const design::InstrumentDescription& instrument, const std::shared_ptr<const design::InstrumentDesign>& design,
                int index, Tally& tally) {
    const auto& board = instrument.boards[static_cast<std::size_t>(index)];
    const auto coupled = [&] {
        LongWork work("finding the partials");
        return design::coupledPoles(*design, index, highestHz + beyondHz, [&](double share) { return work.goOn(share); });
    }();
    if (LongWork::interrupted())
        return;
    tally.notSettled += coupled.notSettled;
    std::vector<analysis::Pole> moving;
    for (const auto& pole : coupled.poles)
        if (!pole.still)
            moving.push_back({pole.frequency, pole.decayRate});
    const auto checked = analysis::checkPoles(soundOf(design, index), sampleRate, moving);

    std::cout << bridgesOf(instrument, index) << "\n"
              << "    predicted      measured      off   ring time T60, s     band\n"
              << "           Hz            Hz     cent  predicted   measured  left, dB  of\n";
    std::size_t next = 0;
    for (const auto& pole : coupled.poles) {
        if (pole.frequency > highestHz)
            break;
        ++tally.poles;
        const auto name = whose(instrument, *design, pole, board);
        std::cout << column(pole.frequency, 3, 13);
        const auto t60 = column(std::log(1000.0) / pole.decayRate, 3, 11);
        if (pole.still) {
            ++tally.still;
            std::cout << "     against each other " << t60 << "  the board stays still  " << name << "\n";
            continue;
        }
        const auto& found = checked[next++];
        const double cents = analysis::centsBetween(found.measured.frequency, pole.frequency);
        const double decay = found.measured.decayRate / pole.decayRate - 1.0;
        const double left = 10.0 * std::log10(found.unexplained);
        tally.worstUnexplained = std::max(tally.worstUnexplained, left);
        bool off = left > mostUnexplained;
        const double centsError = 1200.0 / std::log(2.0) * found.error / (2.0 * std::numbers::pi * pole.frequency);
        if (surely * centsError > mostCents || surely * found.error > mostDecay * pole.decayRate) {
            ++tally.tooNear;
            std::cout << "   too near others or weak " << t60.substring(3) << "           ";
        } else {
            ++tally.measured;
            tally.worstCents = std::max(tally.worstCents, std::abs(cents));
            tally.worstDecay = std::max(tally.worstDecay, std::abs(decay));
            off = off || std::abs(cents) > mostCents || std::abs(decay) > mostDecay;
            std::cout << column(found.measured.frequency, 3, 14) << column(cents, 4, 9) << t60
                      << column(std::log(1000.0) / found.measured.decayRate, 3, 11);
        }
        tally.off += off ? 1 : 0;
        std::cout << column(left, 0, 10) << "  " << name << (off ? "  OFF" : "") << "\n";
    }
    std::cout << "\n";
}

} // namespace

Exit printAllPartials(design::InstrumentDescription instrument, design::Quality quality) {
    for (auto& course : instrument.courses)
        course.frets = 0;
    const auto design = [&] {
        LongWork work("designing");
        return design::makeInstrument(instrument, {sampleRate, quality}, [&](double share) { return work.goOn(share); });
    }();
    if (!design) {
        say(LongWork::interrupted() ? "stopped" : design.error().message);
        return failed;
    }
    Tally tally;
    for (int b = 0; b < std::ssize(instrument.boards); ++b) {
        if (instrument.boards[static_cast<std::size_t>(b)].kind == board::BridgeKind::rigid)
            std::cout << bridgesOf(instrument, b) << " is rigid: its strings sound alone (partials FILE --note N)\n\n";
        else
            printBoard(instrument, *design, b, tally);
        if (LongWork::interrupted()) {
            say("stopped");
            return failed;
        }
    }
    std::cout << tally.poles << " coupled partials up to " << juce::String(highestHz, 0) << " Hz. Together they explain the sound to "
              << juce::String(tally.worstUnexplained, 0) << " dB in every band (allowed " << mostUnexplained << ").\n"
              << tally.measured << " measured each by itself: worst " << juce::String(tally.worstCents, 4) << " cent (allowed "
              << mostCents << "), ring time " << juce::String(100.0 * tally.worstDecay, 2) << " % (allowed " << 100.0 * mostDecay
              << "); " << tally.tooNear << " too near others or too weak for that; " << tally.still
              << " leave the board still; " << tally.notSettled << " not found.\n";
    return tally.off == 0 && tally.notSettled == 0 ? well : failed;
}

} // namespace hitchpin::console
