// What a builder would check before believing a stringing table. Bounds on tension, share and wire are the ones the
// presets set themselves; where one is common practice it says so.
#include "tests/Source/presets/Presets.h"

#include "Source/report/Warnings.h"

#include <cmath>
#include <iostream>
#include <map>
#include <numbers>
#include <set>

using namespace hitchpin;
using namespace hitchpin::presets;

namespace {

constexpr double semitone = 1.0 / 12.0; // of an octave

double octaves(double high, double low) { return std::log2(high / low); }

} // namespace

TEST_CASE("every preset file is in the list of tests", "[presets]") {
    std::set<std::string> there;
    for (const auto& file : juce::File(HITCHPIN_PRESETS).findChildFiles(juce::File::findFiles, false, "*.json"))
        there.insert(file.getFileNameWithoutExtension().toStdString());
    CHECK(there == std::set<std::string>(all.begin(), all.end()));
}

TEST_CASE("presets are written back equal", "[presets]") {
    const auto name = GENERATE(from_range(all));
    INFO(name);
    const auto read = document::load(fileOf(name));
    REQUIRE(read);
    const auto again = document::parse(document::toJson(*read));
    REQUIRE(again);
    CHECK(*again == *read);
    CHECK(read->remarks.size() > 40);
}

TEST_CASE("presets have the compass and the strings they claim", "[presets]") {
    struct Claim {
        std::string name;
        std::size_t courses, strings;
        std::string lowest, highest;
        std::size_t wound;
    };
    const auto claim = GENERATE(values<Claim>({{"lap-harp", 26, 26, "G2", "D6", 6},
                                               {"wire-harp", 29, 29, "G2", "G6", 0},
                                               {"six-course-steel", 6, 6, "E2", "E4", 4},
                                               {"six-course-nylon", 6, 6, "E2", "E4", 3},
                                               {"small-piano", 88, 222, "A0", "C8", 32},
                                               {"clavichord", 45, 90, "C2", "C6", 0},
                                               {"zither", 32, 32, "D2", "A4", 30},
                                               {"test-wire", 1, 1, "A2", "A2", 0}}));
    INFO(claim.name);
    const auto p = preset(claim.name);
    const auto& courses = p.described.instrument.courses;
    CHECK(courses.size() == claim.courses);
    std::size_t strings = 0, wound = 0;
    for (const auto& course : courses) {
        strings += course.strings.size();
        wound += course.strings.front().description.build.windings.empty() ? 0 : 1;
    }
    CHECK(strings == claim.strings);
    CHECK(wound == claim.wound);
    const auto [low, high] = std::minmax_element(courses.begin(), courses.end(),
                                                 [](const auto& a, const auto& b) { return a.openHz < b.openHz; });
    CHECK(low->name == claim.lowest);
    CHECK(high->name == claim.highest);
}

TEST_CASE("the clavichord has a short octave and the piano dampers to F6", "[presets]") {
    const auto clavichord = preset("clavichord");
    std::vector<std::string> bass;
    for (std::size_t i = 0; i < 10; ++i)
        bass.push_back(clavichord.described.instrument.courses[i].name);
    CHECK(bass == std::vector<std::string>{"C2", "D2", "E2", "F2", "G2", "A2", "Bb2", "B2", "C3", "C#3"});
    constexpr int f6 = 89;
    const auto piano = preset("small-piano");
    for (const auto& course : piano.described.instrument.courses) {
        INFO(course.name);
        CHECK(course.hasDamper == (course.key <= f6));
    }
}

TEST_CASE("no preset string is near breaking or slack", "[presets]") {
    constexpr double mostShare = 0.8, leastOfNylon = 0.15;
    const auto name = GENERATE(from_range(all));
    const auto p = preset(name);
    double most = 0.0, least = 1.0, nearest = 0.0;
    for (const auto& course : p.described.instrument.courses)
        for (const auto& string : course.strings) {
            INFO(name << " " << course.name);
            const double share = string.statics.breakingShare;
            const double working = report::workingShare(string.description.build, p.instrument);
            CHECK(share <= mostShare);
            CHECK(share <= working);
            const auto& material = string.description.build.core.material.name;
            if (material.find("nylon") != std::string::npos || material == "gut")
                CHECK(share >= leastOfNylon);
            for (const auto& winding : string.description.build.windings)
                CHECK(winding.diameter >= 0.05e-3 * (1.0 - 1e-12)); // common practice: finer wire is not wound
            most = std::max(most, share);
            least = std::min(least, share);
            nearest = std::max(nearest, share / working);
        }
    std::cout << name << ": total " << std::round(p.schedule.totalTensionN) << " N, shares " << least << " to " << most
              << " of breaking, at most " << 100.0 * nearest << " % of the usual working share\n";
}

TEST_CASE("tensions are those of their kind", "[presets]") {
    const auto tensions = [](const Preset& p, const auto& wanted) {
        std::vector<double> all;
        for (const auto& course : p.described.instrument.courses)
            for (const auto& string : course.strings)
                if (wanted(string))
                    all.push_back(string.statics.tension);
        REQUIRE(!all.empty());
        const auto [low, high] = std::minmax_element(all.begin(), all.end());
        return std::pair(*low, *high);
    };
    const auto any = [](const auto&) { return true; };
    SECTION("piano") {
        const auto p = preset("small-piano");
        const auto plain = tensions(p, [](const auto& s) { return s.description.build.windings.empty(); });
        std::cout << "small-piano: plain strings " << plain.first << " to " << plain.second << " N\n";
        CHECK(plain.first >= 550.0);
        CHECK(plain.second <= 950.0);
        CHECK(p.schedule.totalTensionN >= 130e3);
        CHECK(p.schedule.totalTensionN <= 200e3);
    }
    SECTION("lap harp") { CHECK(preset("lap-harp").schedule.totalTensionN < 3000.0); }
    SECTION("clavichord") {
        const auto all = tensions(preset("clavichord"), any);
        std::cout << "clavichord: strings " << all.first << " to " << all.second << " N\n";
        CHECK(all.second < 80.0);
    }
}

TEST_CASE("lengths fall smoothly within each section", "[presets]") {
    // Over the keys, since a maker draws lengths and not temperaments: never growing, never faster than the pitch
    // rises (half a millimetre of rounding allowed), and from one step to the next by no kink over 0.15 octaves of
    // length an octave beyond that rounding.
    constexpr double rounding = 0.5e-3, kink = 0.15;
    const auto name = GENERATE(from_range(all));
    const auto p = preset(name);
    double worst = 0.0;
    for (const auto& section : sections(p)) {
        double before = -1.0;
        for (std::size_t i = 1; i < section.size(); ++i) {
            const auto& low = p.described.instrument.courses[section[i - 1]];
            const auto& high = p.described.instrument.courses[section[i]];
            INFO(name << " " << low.name << " to " << high.name);
            const double pitch = (high.key - low.key) * semitone;
            const double a = low.strings.front().description.speakingLength;
            const double b = high.strings.front().description.speakingLength;
            CHECK(b <= a);
            if (high.key == low.key)
                continue; // twins
            const double fall = octaves(a, b) / pitch, allowed = rounding / b / std::log(2.0) / pitch;
            CHECK(fall <= 1.0 + allowed);
            if (before >= 0.0) {
                CHECK(std::abs(fall - before) <= kink + allowed);
                worst = std::max(worst, std::abs(fall - before) - allowed);
            }
            before = fall;
        }
    }
    std::cout << name << ": worst kink in the lengths " << worst << " octaves an octave, beyond rounding\n";
}

TEST_CASE("shares are not jagged within a section", "[presets]") {
    // One string at one length gains share with f². Neighbours differ by no more than that, and where the share turns
    // from rising to falling at one course and does so by more than `tooth` on both sides, that is a tooth.
    constexpr double tooth = 0.025;
    const auto name = GENERATE(from_range(all));
    const auto p = preset(name);
    double worstStep = 0.0, worstTooth = 0.0;
    for (const auto& section : sections(p)) {
        double before = 0.0;
        for (std::size_t i = 1; i < section.size(); ++i) {
            const auto& low = p.described.instrument.courses[section[i - 1]];
            const auto& high = p.described.instrument.courses[section[i]];
            INFO(name << " " << low.name << " to " << high.name);
            const double a = low.strings.front().statics.breakingShare;
            const double b = high.strings.front().statics.breakingShare;
            const double pitch = octaves(high.openHz, low.openHz);
            if (pitch > 0.5 * semitone) {
                CHECK(std::abs(octaves(b, a)) <= 2.0 * pitch);
                worstStep = std::max(worstStep, std::abs(octaves(b, a)) / (2.0 * pitch));
            } else {
                CHECK(std::abs(b / a - 1.0) < 0.01);
            }
            if (i > 1 && (b - a) * before < 0.0) {
                const double size = std::min(std::abs(b - a), std::abs(before));
                CHECK(size <= tooth);
                worstTooth = std::max(worstTooth, size);
            }
            before = b - a;
        }
    }
    std::cout << name << ": steepest step " << 100.0 * worstStep << " % of f squared, largest tooth " << worstTooth
              << " of breaking\n";
}

TEST_CASE("presets are marked for nothing but what their remarks own up to", "[presets]") {
    // Wound nylon beside plain nylon is more flexible: known, and told in both remarks.
    const std::map<std::string, std::vector<std::string>> owned{
        {"lap-harp", {"break from E3 to F3 (wound to plain): inharmonicity"}},
        {"six-course-nylon", {"break from D3 to G3 (wound to plain): inharmonicity"}}};
    const auto name = GENERATE(from_range(all));
    INFO(name);
    const auto p = preset(name);
    for (const auto& course : p.schedule.courses)
        for (const auto& warning : course.warnings)
            FAIL_CHECK(course.note << ": " << warning);
    const auto cautions = report::cautions(false);
    auto expected = owned.contains(name) ? owned.at(name) : std::vector<std::string>{};
    for (const auto& warning : p.schedule.warnings) {
        if (std::find(cautions.begin(), cautions.end(), warning) != cautions.end())
            continue;
        const auto found = std::find_if(expected.begin(), expected.end(),
                                        [&](const auto& start) { return warning.rfind(start, 0) == 0; });
        if (found == expected.end())
            FAIL_CHECK(warning);
        else
            expected.erase(found);
    }
    CHECK(expected.empty());
}

TEST_CASE("drawing, bridge and stock agree with the strings", "[presets]") {
    constexpr double drawnMm = 0.1; // what a drawing is read to
    const auto name = GENERATE(from_range(all));
    const auto p = preset(name);
    double worst = 0.0;
    std::map<std::string, double> lastPosition;
    std::map<std::string, std::set<double>> used;
    for (const auto& course : p.instrument.courses) {
        INFO(name << " " << course.note.value_or("?"));
        const auto& plan = course.plan;
        const double drawn = std::hypot(plan.nutMm[0] - plan.bridgeMm[0], plan.nutMm[1] - plan.bridgeMm[1]);
        worst = std::max(worst, std::abs(drawn - course.speakingLengthMm));
        CHECK(std::abs(drawn - course.speakingLengthMm) <= drawnMm);
        REQUIRE(course.bridgePosition);
        const auto last = lastPosition.find(course.bridge);
        if (last != lastPosition.end())
            CHECK(*course.bridgePosition > last->second);
        lastPosition[course.bridge] = *course.bridgePosition;
        used[course.core.material].insert(course.core.diameterMm);
        for (const auto& winding : course.windings)
            used[winding.material].insert(winding.diameterMm.value_or(0.0));
    }
    std::map<std::string, std::set<double>> stock;
    for (const auto& [material, diameters] : p.instrument.gauges)
        stock[material].insert(diameters.begin(), diameters.end());
    for (const auto& [material, diameters] : used)
        for (const double diameter : diameters) {
            INFO(name << " " << material << " " << diameter << " mm");
            CHECK(stock[material].contains(diameter));
        }
    std::cout << name << ": drawn lengths true within " << worst << " mm\n";
}

// Real mobilities at the bridge: guitars and violins 1e-3…1e-1 s/kg; piano bridges 150…1e4 kg/s, about 1e3 (from memory).
TEST_CASE("preset soundboards are believable", "[presets]") {
    const auto name = GENERATE(from_range(all));
    const auto p = preset(name);
    for (const auto& bridge : p.described.instrument.bridges) {
        const auto& board = p.described.instrument.boards[static_cast<std::size_t>(bridge.board)];
        if (board.kind != board::BridgeKind::soundboard)
            continue;
        INFO(name << " " << bridge.name);
        const auto low = std::count_if(board.modes.begin(), board.modes.end(), [](const auto& m) { return m.frequency < 600.0; });
        CHECK(low >= 5);
        CHECK(low <= 15);
        CHECK(std::ssize(board.modes) > low); // and more above
        const bool large = name == std::string("small-piano");
        const double least = large ? 1e-4 : 1e-3, most = large ? 1.0 / 150.0 : 1e-1;
        const board::MobilityAt mobility(board, board::sharing(bridge, 0.5));
        double lowest = 1e9, highest = 0.0, sum = 0.0;
        int count = 0;
        for (double hz = 80.0; hz < 5000.0; hz *= 1.002, ++count) {
            const double y = std::abs(mobility({0.0, 2.0 * std::numbers::pi * hz}).into);
            lowest = std::min(lowest, y);
            highest = std::max(highest, y);
            sum += std::log(y);
        }
        std::cout << name << " " << bridge.name << ": " << board.modes.size() << " modes, " << low
                  << " below 600 Hz; mobility " << lowest << " to " << highest << " s/kg, geometric mean "
                  << std::exp(sum / count) << "\n";
        CHECK(lowest >= least);
        CHECK(highest <= most);
    }
}
