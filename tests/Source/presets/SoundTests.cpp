// Every preset string is in tune in its loop and in its sound, every course is heard, and decays are those of a board.
#include "tests/Source/presets/Presets.h"

#include "dsp/analysis/CheckPoles.h"
#include "dsp/analysis/Measure.h"
#include "dsp/board/OnBoard.h"

#include <cmath>
#include <iostream>
#include <numbers>

using namespace hitchpin;
using namespace hitchpin::presets;

namespace {

constexpr double rate = 48000.0;
/// The goal for the first partial: far under what an ear can tell (about a cent; common practice).
constexpr double f1Cents = 0.05;

std::shared_ptr<const design::InstrumentDesign> designed(const design::InstrumentDescription& description) {
    auto made = design::makeInstrument(description, {rate, design::Quality::live});
    if (!made)
        FAIL(made.error().message);
    return *made;
}

std::vector<double> pluckedAlone(const Preset& p, std::size_t course, double seconds) {
    auto alone = p.described.instrument;
    alone.courses = {alone.courses[course]};
    alone.courses.front().strings.resize(1);
    alone.courses.front().frets = 0;
    alone.boards.assign(alone.boards.size(), {}); // rigid
    engine::Engine engine(designed(alone));
    engine::Pluck pluck;
    pluck.pointRatio = alone.courses.front().pluckRatio;
    engine.pluck(0, pluck);
    std::vector<double> sound(static_cast<std::size_t>(seconds * rate));
    engine.process(sound.data(), nullptr, static_cast<int>(sound.size()));
    return sound;
}

} // namespace

TEST_CASE("every preset string and fret is in tune and every course is heard", "[presets][sound]") {
    constexpr double quietest = -50.0; // dB of full scale, peak of a forte pluck: well over a quiet room's noise
    constexpr double forte = 100.0;    // MIDI velocity
    constexpr int frames = 1024;       // a pluck anywhere on the lowest string has reached the bridge by then
    const auto name = GENERATE(from_range(all));
    const auto p = preset(name);
    const auto design = designed(p.described.instrument);

    double worstCents = 0.0;
    std::size_t loops = 0;
    for (const auto& string : design->strings)
        for (std::size_t stop = 0; stop < string.stops.size(); ++stop) {
            INFO(name << " " << p.described.instrument.courses[static_cast<std::size_t>(string.course)].name
                      << " fret " << stop);
            const auto& partials = string.stops[stop].loop.accuracy.partials;
            const auto first = std::find_if(partials.begin(), partials.end(), [](const auto& e) { return e.number == 1; });
            REQUIRE(first != partials.end());
            CHECK(std::abs(first->cents) <= f1Cents);
            worstCents = std::max(worstCents, std::abs(first->cents));
            ++loops;
        }

    playing::Player player(design, p.described.rules);
    double quiet = 0.0, loud = -1000.0;
    std::vector<double> sound(static_cast<std::size_t>(frames));
    for (const auto& course : p.described.instrument.courses) {
        INFO(name << " " << course.name);
        player.reset();
        const playing::Event on{0, playing::Event::Kind::noteOn, 1, course.key, forte};
        player.process({&on, 1}, sound.data(), nullptr, frames);
        double peak = 0.0;
        bool finite = true;
        for (const double s : sound) {
            finite = finite && std::isfinite(s);
            peak = std::max(peak, std::abs(s));
        }
        REQUIRE(finite);
        const double db = 20.0 * std::log10(std::max(peak, 1e-30) / playing::fullScaleNewtons);
        CHECK(db >= quietest);
        CHECK(db <= 0.0);
        quiet = std::min(quiet, db);
        loud = std::max(loud, db);
    }
    std::cout << name << ": " << loops << " loops, worst first partial " << worstCents << " cents of " << f1Cents
              << " by its pole; forte peaks " << quiet << " to " << loud << " dB of full scale\n";
}

TEST_CASE("the sound of preset strings is in tune", "[presets][sound]") {
    // Alone between its ends. The meter takes its frequencies from the sound alone.
    const auto name = GENERATE(from_range(all));
    const auto p = preset(name);
    const auto& courses = p.described.instrument.courses;
    double worst = 0.0;
    for (std::size_t part = 0; part < 5; ++part) {
        const auto index = (courses.size() - 1) * part / 4;
        INFO(name << " " << courses[index].name);
        const auto& partials = courses[index].strings.front().partials;
        std::vector<double> expected;
        for (int n = 1; n <= 6 && partials.frequency(n) < 0.4 * rate; ++n)
            expected.push_back(partials.frequency(n));
        const auto measured = analysis::measurePartials(pluckedAlone(p, index, 1.0), rate, expected);
        REQUIRE(measured.front().frequency > 0.0);
        const double cents = analysis::centsBetween(measured.front().frequency, partials.frequency(1));
        CHECK(std::abs(cents) <= f1Cents);
        worst = std::max(worst, std::abs(cents));
    }
    std::cout << name << ": worst measured first partial " << worst << " cents of " << f1Cents << "\n";
}

TEST_CASE("preset strings are in tune on their boards", "[presets]") {
    // Each is tuned with the others at rest as they were before they were tuned themselves: that much is left.
    constexpr double cents = 0.01;
    const auto name = GENERATE(from_range(all));
    const auto p = preset(name);
    double worst = 0.0;
    for (std::size_t i = 0; i < p.schedule.courses.size(); ++i) {
        const auto& given = p.instrument.courses[i];
        if (given.tensionN)
            continue;
        const double detune = given.detuneCents.empty() ? 0.0 : given.detuneCents.front();
        const double off = analysis::centsBetween(p.schedule.courses[i].pitchHz, p.described.instrument.courses[i].openHz) - detune;
        INFO(name << " " << p.schedule.courses[i].note);
        CHECK(std::abs(off) <= cents);
        worst = std::max(worst, std::abs(off));
    }
    std::cout << name << ": on the board out of tune by " << worst << " cents at most\n";
}

TEST_CASE("preset strings sound on their boards as the schedule says", "[presets][sound]") {
    // All other strings under their dampers, as the schedule takes them: at rest on the bridge. What is left between
    // the two: the schedule takes the partial's spacing as steady about it, the loop is a live one.
    constexpr double cents = 0.5, decay = 0.03;
    const auto name = GENERATE(from_range(all));
    const auto p = preset(name);
    auto instrument = p.described.instrument;
    for (auto& course : instrument.courses)
        course.frets = 0;
    const auto design = designed(instrument);
    double worstCents = 0.0, worstDecay = 0.0;
    for (std::size_t part = 0; part < 5; ++part) {
        const auto index = (instrument.courses.size() - 1) * part / 4;
        INFO(name << " " << instrument.courses[index].name);
        const auto& row = p.schedule.courses[index];
        engine::Engine engine(design);
        const int own = design->courses[index].firstString;
        for (int s = 0; s < static_cast<int>(design->strings.size()); ++s)
            if (s != own)
                engine.damp(s, 0.01);
        engine.pluck(own, {1.0, 0.2, 0.0, 0.5 * std::numbers::pi});
        // Plucks, and the board's own resonances, are over by then.
        std::vector<double> sound(static_cast<std::size_t>(2.0 * rate));
        engine.process(sound.data(), nullptr, static_cast<int>(rate));
        engine.process(sound.data(), nullptr, static_cast<int>(sound.size()));
        // All that sounds near the first partial: in both motions, which may lie a hundredth of a hertz apart.
        std::vector<analysis::Pole> said;
        const auto& string = instrument.courses[index].strings.front();
        for (int n = 1; n <= 8; ++n)
            for (const auto motion : {board::Motion::mostlyInto, board::Motion::mostlyAcross}) {
                const auto partial = board::partialOnBoard(string.partials, string.statics.impedance,
                                                           design::mobilityFor(instrument, index, 0), n, motion);
                // On a rigid bridge both motions are one.
                if (partial.frequency < row.pitchHz + 200.0 &&
                    (said.empty() || said.back().frequency != partial.frequency))
                    said.push_back({partial.frequency, partial.decayRate});
            }
        std::sort(said.begin(), said.end(), [](const auto& a, const auto& b) { return a.frequency < b.frequency; });
        const auto found = analysis::checkPoles(sound, rate, said);
        const auto nearest = std::min_element(said.begin(), said.end(), [&](const auto& a, const auto& b) {
            return std::hypot(a.frequency / row.pitchHz - 1.0, row.boardT60S.front() * a.decayRate / std::log(1000.0) - 1.0) <
                   std::hypot(b.frequency / row.pitchHz - 1.0, row.boardT60S.front() * b.decayRate / std::log(1000.0) - 1.0);
        });
        const auto& measured = found[static_cast<std::size_t>(nearest - said.begin())].measured;
        worstCents = std::max(worstCents, std::abs(analysis::centsBetween(measured.frequency, row.pitchHz)));
        worstDecay = std::max(worstDecay,
                              std::abs(std::log(1000.0) / measured.decayRate / row.boardT60S.front() - 1.0));
    }
    std::cout << name << ": on the board, sound against schedule: worst " << worstCents << " cents of " << cents << ", ring time "
              << 100.0 * worstDecay << " % of " << 100.0 * decay << "\n";
    CHECK(worstCents <= cents);
    CHECK(worstDecay <= decay);
}

TEST_CASE("strings on their boards ring as long as a builder expects", "[presets][sound]") {
    // A third of a second at the top of a piano to under 20 s at its bottom are common practice.
    constexpr double shortest = 0.3, longest = 20.0;
    const auto name = GENERATE(from_range(all));
    const auto p = preset(name);
    double least = 1e9, most = 0.0;
    for (const auto& row : p.schedule.courses) {
        INFO(name << " " << row.note);
        if (name == std::string("test-wire")) // on a rigid post
            continue;
        const double t60 = row.boardT60S.front();
        CHECK(t60 < row.decayT60S.front()); // nothing rings longer for having a board
        CHECK(t60 >= shortest);
        CHECK(t60 <= longest);
        least = std::min(least, t60);
        most = std::max(most, t60);
    }
    if (most > 0.0)
        std::cout << name << ": T60 of the first partial on the board " << least << " to " << most << " s\n";
}
