// From the workshop's units to physics: pitch, tension, climate, bridges, the hand.
#include "Source/document/Document.h"

#include "Source/document/NotHeardYet.h"
#include "Source/document/Rules.h"
#include "Source/document/Strung.h"
#include "dsp/board/OnBoard.h"
#include "dsp/tuning/Notes.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <numbers>

namespace hitchpin::document {

namespace {

constexpr double tunedAtC = 20.0;
/// The stretch needs the strings' inharmonicity and moves it in turn, by some parts in ten thousand.
constexpr int stretchRounds = 3;

double ratio(double cents) { return std::exp2(cents / 1200.0); }
double radians(double degrees) { return degrees * std::numbers::pi / 180.0; }

/// B over the compass: geometric between the notes that have strings, level beyond them.
class InharmonicityCurve {
public:
    void add(int note, double b) { logB_[note] = std::log(std::max(b, 1e-9)); }
    double operator()(int note) const {
        if (logB_.empty())
            return 0.0;
        const auto above = logB_.lower_bound(note);
        if (above == logB_.end())
            return std::exp(logB_.rbegin()->second);
        if (above->first == note || above == logB_.begin())
            return std::exp(above->second);
        const auto below = std::prev(above);
        const double t = double(note - below->first) / double(above->first - below->first);
        return std::exp(std::lerp(below->second, above->second, t));
    }

private:
    std::map<int, double> logB_;
};

class Describing {
public:
    Describing(const Instrument& instrument, const Adjustments& adjustments, int partialCount)
        : instrument_(instrument), adjustments_(adjustments), partialCount_(partialCount), tuning_(unstretched()) {}

    Result<Described, Problems> describe() {
        // Only a document that was edited since it was read can break a rule here.
        if (auto broken = brokenRules(instrument_); !broken.empty())
            return broken;
        described_.instrument.name = instrument_.name;
        bridges();
        stretch();
        auto courses = strungCourses();
        if (!problems_.empty())
            return std::move(problems_);
        if (instrument_.playing.notes == Notes::everyKeyStrung)
            courses = withMissingKeys(std::move(courses));
        for (const auto& course : courses)
            this->course(course);
        if (problems_.empty() && instrument_.tuning.tuned == Tuned::onTheBoard)
            tuneOnTheBoard(courses);
        if (problems_.empty())
            adjust(courses);
        if (!problems_.empty())
            return std::move(problems_);
        rules();
        described_.notHeardYet = notHeardYet(instrument_);
        return std::move(described_);
    }

private:
    /// A course of the file or between two of them, and the key it answers to.
    struct Placed {
        Course course;
        std::string path;
        int key;
        int bridge;
        double position;
    };

    tuning::Tuning unstretched() const {
        const auto& tuning = instrument_.tuning;
        const auto* temperament = tuning::findTemperament(tuning.temperament);
        const auto root = tuning::pitchClass(tuning.root);
        static const auto& equal = tuning::builtInTemperaments().front();
        return {tuning.a4Hz, temperament != nullptr ? *temperament : equal, root.value_or(0), tuning.offsetsCents};
    }

    template <class T>
    std::optional<T> got(Result<T> result, const std::string& path) {
        if (result)
            return std::move(result).value();
        problems_.push_back({path, path + ": " + result.error().message});
        return std::nullopt;
    }

    void bridges() {
        auto all = instrument_.bridges;
        if (all.empty())
            all.emplace_back();
        auto& instrument = described_.instrument;
        for (const auto& from : all) {
            int board = static_cast<int>(instrument.boards.size());
            if (from.board.empty()) {
                auto& own = instrument.boards.emplace_back();
                own.kind = static_cast<board::BridgeKind>(from.kind);
                for (const auto& mode : from.modes)
                    own.modes.push_back({mode.frequencyHz, mode.q, mode.massKg, radians(mode.angleDeg), mode.shape,
                                         mode.pan});
            } else {
                board = instrument.bridges[static_cast<std::size_t>(bridgeNamed(from.board))].board;
            }
            if (from.kind == BridgeKind::rigid)
                instrument.bridges.push_back({from.name, board});
            else
                instrument.bridges.push_back(
                    board::addBridge(from.name, board, instrument.boards[static_cast<std::size_t>(board)], from.points,
                                     from.resistanceKgS));
        }
        for (auto& board : instrument.boards)
            for (auto& mode : board.modes)
                if (mode.shape.empty())
                    mode.shape.assign(board.points.size(), 1.0);
    }

    /// The first where there is none of that name.
    int bridgeNamed(const std::string& name) const {
        const auto& all = described_.instrument.bridges;
        const auto found = std::find_if(all.begin(), all.end(), [&](const auto& b) { return b.name == name; });
        return found == all.end() ? 0 : static_cast<int>(found - all.begin());
    }

    void stretch() {
        const auto kind = static_cast<tuning::Stretch>(instrument_.tuning.stretch);
        if (kind == tuning::Stretch::none)
            return;
        for (int round = 0; round < stretchRounds; ++round) {
            InharmonicityCurve curve;
            for (const auto& course : instrument_.courses)
                if (const auto note = noteOf(course))
                    if (const auto strung = tuned(stringOf(course, 0), 0.0, tuning_, instrument_, fewPartials))
                        curve.add(*note, strung->statics.inharmonicity);
            tuning_ = unstretched().stretched(kind, std::cref(curve));
        }
    }

    int nearestKey(double hz) const {
        int best = 0;
        for (int note = 1; note < 128; ++note)
            if (std::abs(std::log(hz / tuning_.frequency(note))) < std::abs(std::log(hz / tuning_.frequency(best))))
                best = note;
        return best;
    }

    std::vector<Placed> strungCourses() {
        std::vector<int> ofBridge(described_.instrument.bridges.size(), 0);
        for (const auto& course : instrument_.courses)
            ++ofBridge[static_cast<std::size_t>(bridgeNamed(course.bridge))];
        std::vector<int> placed(ofBridge.size(), 0);
        std::vector<Placed> all;
        for (std::size_t i = 0; i < instrument_.courses.size(); ++i) {
            const auto& course = instrument_.courses[i];
            const auto path = "courses[" + std::to_string(i) + "]";
            const int bridge = bridgeNamed(course.bridge);
            const auto b = static_cast<std::size_t>(bridge);
            const double evenly = (placed[b]++ + 0.5) / ofBridge[b];
            int key = 0;
            if (const auto note = noteOf(course))
                key = *note;
            else if (course.pitchHz)
                key = nearestKey(*course.pitchHz * ratio(course.cents));
            else if (const auto strung = got(tuned(course, 0.0, tuning_, instrument_, fewPartials), path))
                key = nearestKey(strung->partials.frequency(1));
            all.push_back({course, path, key, bridge, course.bridgePosition.value_or(evenly)});
        }
        return all;
    }

    /// A course for every key between the lowest and the highest, from its neighbours.
    std::vector<Placed> withMissingKeys(std::vector<Placed> given) const {
        std::stable_sort(given.begin(), given.end(), [](const auto& a, const auto& b) { return a.key < b.key; });
        std::vector<Placed> all;
        for (std::size_t i = 0; i < given.size(); ++i) {
            all.push_back(given[i]);
            if (i + 1 == given.size())
                break;
            const auto &low = given[i], &high = given[i + 1];
            for (int key = low.key + 1; key < high.key; ++key) {
                const double t = double(key - low.key) / double(high.key - low.key);
                const auto& nearer = t < 0.5 ? low : high;
                auto between = strungBetween(low.course, high.course, t, instrument_);
                between.note = tuning::noteName(key);
                const auto path = "the course for " + *between.note + " between " + low.path + " and " + high.path;
                all.push_back({std::move(between), path, key, nearer.bridge,
                               low.bridge == high.bridge ? std::lerp(low.position, high.position, t) : nearer.position});
            }
        }
        return all;
    }

    /// What else may be turned without touching the document acts on the tuned string, the climate last.
    std::optional<string::Strung> adjusted(string::Strung strung, const std::string& path) {
        if (adjustments_.tensionFactor != 1.0 || adjustments_.lengthFactor != 1.0) {
            auto longer = strung.description;
            longer.speakingLength *= adjustments_.lengthFactor;
            auto next = got(string::strungToTension(longer, strung.statics.tension * adjustments_.tensionFactor, partialCount_),
                            path);
            if (!next)
                return next;
            strung = std::move(*next);
        }
        const double kelvin = instrument_.climate.temperatureC - tunedAtC + adjustments_.temperatureOffsetK;
        if (kelvin != 0.0)
            return got(string::atTemperature(strung, kelvin, instrument_.climate.frameExpansionPerK), path);
        return strung;
    }

    void course(const Placed& placed) {
        const auto& from = placed.course;
        design::CourseDescription to;
        to.name = from.note.value_or(tuning::noteName(placed.key));
        to.key = placed.key;
        to.bridge = placed.bridge;
        to.bridgePosition = placed.position;
        to.pluckRatio = playing::pluckable(pluckRatioOf(from, instrument_.playing.with) + adjustments_.pluckPointOffset);
        to.hasDamper = from.damper;
        to.frets = from.frets;
        for (int s = 0; s < from.strings; ++s) {
            const auto index = static_cast<std::size_t>(s);
            const auto path = placed.path + (from.each.empty() ? "" : ".each[" + std::to_string(s) + "]");
            // Strings that are alike in everything are worked out once.
            if (likeTheOneBefore(from, index)) {
                to.strings.push_back(to.strings.back());
                continue;
            }
            const double off = detuneOf(from, index) + adjustments_.pitchOffsetCents;
            auto strung = got(tuned(stringOf(from, index), off, tuning_, instrument_, partialCount_), path);
            if (!strung)
                return;
            if (s == 0)
                to.openHz = from.tensionN ? strung->partials.frequency(1) / ratio(off) : pitchOf(stringOf(from, 0), tuning_);
            to.strings.push_back(std::move(*strung));
        }
        described_.instrument.courses.push_back(std::move(to));
    }

    static bool likeTheOneBefore(const Course& course, std::size_t string) {
        return string > 0 && course.each.empty() && detuneOf(course, string) == detuneOf(course, string - 1);
    }
    static double detuneOf(const Course& course, std::size_t string) {
        return course.detuneCents.empty() ? 0.0 : course.detuneCents[string];
    }

    /// Every string that has a pitch to meet is brought to it on the board, the others at rest meanwhile. Those with a
    /// given tension keep it.
    void tuneOnTheBoard(const std::vector<Placed>& placed) {
        const auto alone = described_.instrument;
        for (std::size_t c = 0; c < placed.size(); ++c) {
            if (design::boardOf(alone, alone.courses[c]).kind == board::BridgeKind::rigid)
                continue;
            auto& strings = described_.instrument.courses[c].strings;
            for (std::size_t s = 0; s < strings.size(); ++s) {
                if (stringOf(placed[c].course, s).tensionN || strings[s].description.ends.bridge == string::End::free)
                    continue;
                if (likeTheOneBefore(placed[c].course, s)) {
                    strings[s] = strings[s - 1];
                    continue;
                }
                auto tuned = got(board::tunedOnBoard(strings[s], strings[s].partials.frequency(1),
                                                     design::mobilityFor(alone, c, s), partialCount_),
                                 placed[c].path);
                if (tuned)
                    strings[s] = std::move(*tuned);
            }
        }
    }

    void adjust(const std::vector<Placed>& placed) {
        for (std::size_t c = 0; c < placed.size(); ++c)
            for (auto& string : described_.instrument.courses[c].strings)
                if (auto ready = adjusted(std::move(string), placed[c].path))
                    string = std::move(*ready);
    }

    void rules() {
        const auto& playing = instrument_.playing;
        auto& rules = described_.rules;
        rules.pluckPointOffset = adjustments_.pluckPointOffset;
        rules.width = playing.widthMm * 1e-3;
        rules.force = playing.heightMm ? forceForHeight(*playing.heightMm * 1e-3) : playing.forceN;
        rules.angle = radians(playing.angleDeg);
        rules.keys = static_cast<playing::KeyTaking>(playing.notes);
        rules.channelPerCourse = playing.channelPerCourse;
        const bool plucked = playing.with == With::finger || playing.with == With::plectrum;
        const double whole = !plucked           ? measureAt(64.0)
                             : playing.heightMm ? *playing.heightMm
                                                : playing.forceN;
        for (const auto& [velocity, measure] : playing.velocity)
            rules.velocity.push_back({velocity, whole > 0 ? measure / whole : 1.0});
    }

    double measureAt(double velocity) const {
        const auto& points = instrument_.playing.velocity;
        if (points.empty())
            return 1.0;
        for (std::size_t i = 1; i < points.size(); ++i)
            if (velocity <= points[i][0])
                return std::lerp(points[i - 1][1], points[i][1],
                                 std::clamp((velocity - points[i - 1][0]) / (points[i][0] - points[i - 1][0]), 0.0, 1.0));
        return points.back()[1];
    }

    /// F = T·h/(L·β·(1−β)), the pull that draws an ideal string aside by h at βL; of the middle course.
    double forceForHeight(double height) const {
        const auto& courses = described_.instrument.courses;
        const auto& middle = courses[courses.size() / 2];
        const auto& string = middle.strings.front();
        return string.statics.tension * height /
               (string.description.speakingLength * middle.pluckRatio * (1.0 - middle.pluckRatio));
    }

    const Instrument& instrument_;
    const Adjustments& adjustments_;
    int partialCount_;
    tuning::Tuning tuning_;
    Described described_;
    Problems problems_;
};

} // namespace

Result<Described, Problems> describe(const Instrument& instrument, const Adjustments& adjustments, int partialCount) {
    return Describing(instrument, adjustments, partialCount).describe();
}

} // namespace hitchpin::document
