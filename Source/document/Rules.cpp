#include "Source/document/Rules.h"

#include "Source/document/Field.h"
#include "dsp/string/Material.h"
#include "dsp/tuning/Notes.h"
#include "dsp/tuning/Tuning.h"

#include <algorithm>
#include <set>

namespace hitchpin::document {

namespace {

std::string quoted(const std::string& text) {
    return jsonLine(juce::String::fromUTF8(text.data(), static_cast<int>(text.size()))).toStdString();
}

/// On one board; as many as a bridge alone may have.
constexpr int mostPoints = 256;

std::string indexed(const std::string& name, std::size_t index) { return name + "[" + std::to_string(index) + "]"; }

class Rules {
public:
    explicit Rules(const Instrument& instrument) : instrument_(instrument) {
        for (const auto& material : string::builtInMaterials())
            materials_.insert(material.name);
        for (const auto& [name, material] : instrument.materials)
            materials_.insert(name);
        for (const auto& bridge : instrument.bridges)
            bridges_.push_back(bridge.name);
        if (bridges_.empty())
            bridges_.push_back(Bridge{}.name);
    }

    Problems check() {
        tuning();
        for (const auto& [name, material] : instrument_.materials)
            rising("materials[" + quoted(name) + "].strength_by_diameter", material.strengthByDiameter, "mm");
        for (const auto& [name, diameters] : instrument_.gauges) {
            knownMaterial("gauges", name);
            for (std::size_t i = 1; i < diameters.size(); ++i)
                if (diameters[i] <= diameters[i - 1])
                    add("gauges[" + quoted(name) + "]" + indexed("", i),
                        " = " + numberText(diameters[i]) + " mm: must be over the one before, " +
                            numberText(diameters[i - 1]) + " mm");
        }
        for (std::size_t i = 0; i < instrument_.bridges.size(); ++i)
            bridge(i);
        for (std::size_t i = 0; i < instrument_.courses.size(); ++i)
            course(indexed("courses", i), instrument_.courses[i]);
        playing();
        return std::move(problems_);
    }

private:
    void add(const std::string& path, const std::string& rest) { problems_.push_back({path, path + rest}); }

    template <class Names>
    std::string listed(const Names& all) const {
        std::string out;
        for (const auto& name : all)
            out += (out.empty() ? "" : ", ") + name;
        return out;
    }

    void knownMaterial(const std::string& path, const std::string& name) {
        if (!name.empty() && !materials_.contains(name))
            add(path, " = " + quoted(name) + ": no such material; known are " + listed(materials_));
    }

    void note(const std::string& path, const std::string& name) {
        if (!tuning::noteNumber(name))
            add(path, " = " + quoted(name) + ": must be a note from C-1 to G9, such as \"C4\", \"F#2\" or \"Bb3\"");
    }

    template <class Pairs>
    void rising(const std::string& path, const Pairs& pairs, const std::string& unit) {
        for (std::size_t i = 1; i < pairs.size(); ++i)
            if (pairs[i][0] <= pairs[i - 1][0])
                add(indexed(path, i) + "[0]", " = " + numberText(pairs[i][0]) + (unit.empty() ? "" : " " + unit) +
                                                  ": must be over the one before, " + numberText(pairs[i - 1][0]) +
                                                  (unit.empty() ? "" : " " + unit));
    }

    void tuning() {
        const auto& tuning = instrument_.tuning;
        if (tuning::findTemperament(tuning.temperament) == nullptr) {
            std::vector<std::string> known;
            for (const auto& temperament : tuning::builtInTemperaments())
                known.push_back(temperament.name);
            add("tuning.temperament",
                " = " + quoted(tuning.temperament) + ": no such temperament; known are " + listed(known));
        }
        if (!tuning::pitchClass(tuning.root))
            add("tuning.root", " = " + quoted(tuning.root) + ": must be a note name such as \"C\", \"F#\" or \"Bb\"");
    }

    void bridge(std::size_t index) {
        const auto& bridge = instrument_.bridges[index];
        const auto path = indexed("bridges", index);
        for (std::size_t other = 0; other < index; ++other)
            if (instrument_.bridges[other].name == bridge.name) {
                add(path + ".name", " = " + quoted(bridge.name) + ": bridges[" + std::to_string(other) +
                                        "] has this name already");
                break;
            }
        if (bridge.kind != BridgeKind::soundboard && !bridge.modes.empty())
            add(path + ".modes", " belong to a bridge of kind \"soundboard\"");
        if (!bridge.board.empty())
            onBoardOf(path, index);
        else
            ownBoard(path, bridge);
    }

    void onBoardOf(const std::string& path, std::size_t index) {
        const auto& all = instrument_.bridges;
        const auto& bridge = all[index];
        if (bridge.kind != BridgeKind::soundboard)
            add(path + ".board", " belongs to a bridge of kind \"soundboard\"");
        if (!bridge.modes.empty())
            add(path + ".modes", " belong to the bridge whose board it is, " + quoted(bridge.board));
        const auto said = " = " + quoted(bridge.board) + ": ";
        const auto owner = std::find_if(all.begin(), all.end(), [&](const auto& b) { return b.name == bridge.board; });
        const auto name = indexed("bridges", static_cast<std::size_t>(owner - all.begin()));
        if (owner == all.end())
            add(path + ".board", said + "no such bridge; known are " + listed(bridges_));
        else if (owner >= all.begin() + static_cast<std::ptrdiff_t>(index))
            add(path + ".board", said + "must be a bridge before this one");
        else if (!owner->board.empty())
            add(path + ".board", said + name + " stands on the board of " + quoted(owner->board) + " itself: name that");
        else if (owner->kind != BridgeKind::soundboard)
            add(path + ".board", said + name + " has no soundboard");
    }

    void ownBoard(const std::string& path, const Bridge& bridge) {
        int points = bridge.points;
        bool alone = true;
        for (const auto& other : instrument_.bridges)
            if (!other.board.empty() && other.board == bridge.name) {
                points += other.points;
                alone = false;
            }
        if (points > mostPoints)
            add(path, ": its board has " + std::to_string(points) + " points, those of all bridges on it: must be at most " +
                          std::to_string(mostPoints));
        for (std::size_t m = 0; m < bridge.modes.size(); ++m) {
            const auto shape = bridge.modes[m].shape.size();
            if (shape != 0 && shape != static_cast<std::size_t>(points))
                add(path + indexed(".modes", m) + ".shape",
                    " has " + std::to_string(shape) + " entries: must have one for each " +
                        (alone ? "of the bridge's points, " : "point of the bridges on its board, ") +
                        std::to_string(points));
        }
    }

    void course(const std::string& path, const Course& course) {
        pitch(path, course, true);
        const auto strings = static_cast<std::size_t>(course.strings);
        const auto perString = [&](const char* key, std::size_t size) {
            if (size != 0 && size != strings)
                add(path + "." + key, " has " + std::to_string(size) + " entries: must have one for each string, " +
                                          std::to_string(strings));
        };
        perString("detune_cents", course.detuneCents.size());
        perString("each", course.each.size());
        if (!course.bridge.empty() && std::find(bridges_.begin(), bridges_.end(), course.bridge) == bridges_.end())
            add(path + ".bridge", " = " + quoted(course.bridge) + ": no such bridge; known are " + listed(bridges_));
        const int points = (course.pluckRatio ? 1 : 0) + (course.pluckPointMm ? 1 : 0);
        if (points == 2)
            add(path + ".pluck_point_mm", " stands beside pluck_ratio: give one of the two");
        if (course.pluckPointMm && course.speakingLengthMm > 0 && *course.pluckPointMm >= course.speakingLengthMm)
            add(path + ".pluck_point_mm", " = " + numberText(*course.pluckPointMm) +
                                              " mm: must be under the speaking length, " +
                                              numberText(course.speakingLengthMm) + " mm");
        build(path, course, course.speakingLengthMm);
        for (std::size_t i = 0; i < course.each.size(); ++i) {
            const auto& one = course.each[i];
            pitch(path + indexed(".each", i), one, false);
            const auto whole = stringOf(course, i);
            // What comes from the course itself has been checked there.
            build(path + indexed(".each", i), one,
                  one.windings.empty() ? 0.0 : whole.speakingLengthMm);
            if (one.windings.empty() && one.speakingLengthMm > 0)
                bareEnds(path + indexed(".each", i), course.windings, one.speakingLengthMm);
        }
    }

    void pitch(const std::string& path, const Course& course, bool needed) {
        const int ways = (course.note ? 1 : 0) + (course.pitchHz ? 1 : 0) + (course.tensionN ? 1 : 0);
        if (ways > 1 || (needed && ways == 0))
            add(path, ways == 0 ? ": the pitch is missing: give note, pitch_hz or tension_n"
                                : ": the pitch is given more than once: give only one of note, pitch_hz and tension_n");
        if (course.note)
            note(path + ".note", *course.note);
    }

    void build(const std::string& path, const Course& course, double lengthMm) {
        knownMaterial(path + ".core.material", course.core.material);
        for (std::size_t w = 0; w < course.windings.size(); ++w) {
            const auto& winding = course.windings[w];
            const auto at = path + indexed(".windings", w);
            knownMaterial(at + ".material", winding.material);
            if (winding.shape == WindingShape::round) {
                if (!winding.diameterMm)
                    add(at + ".diameter_mm", " is missing: round wire needs it");
                if (winding.thicknessMm || winding.widthMm)
                    add(at, ": thickness_mm and width_mm belong to flat wire (\"shape\": \"flat\")");
            } else {
                if (!winding.thicknessMm)
                    add(at + ".thickness_mm", " is missing: flat wire needs it");
                if (!winding.widthMm)
                    add(at + ".width_mm", " is missing: flat wire needs it");
                if (winding.diameterMm)
                    add(at, ": diameter_mm belongs to round wire");
            }
        }
        if (lengthMm > 0)
            bareEnds(path, course.windings, lengthMm);
    }

    void bareEnds(const std::string& path, const std::vector<Winding>& windings, double lengthMm) {
        for (std::size_t w = 0; w < windings.size(); ++w) {
            const double bare = windings[w].bareMm[0] + windings[w].bareMm[1];
            if (bare >= lengthMm)
                add(path + indexed(".windings", w) + ".bare_mm",
                    " = " + numberText(bare) + " mm in all: must be under the speaking length, " +
                        numberText(lengthMm) + " mm");
            if (w > 0 && (windings[w].bareMm[0] < windings[w - 1].bareMm[0] ||
                          windings[w].bareMm[1] < windings[w - 1].bareMm[1]))
                add(path + indexed(".windings", w) + ".bare_mm",
                    " leaves less bare than the winding under it: an outer winding lies on an inner one");
        }
    }

    void playing() {
        const auto& playing = instrument_.playing;
        rising("playing.velocity", playing.velocity, "");
        for (std::size_t i = 0; i < playing.hammers.size(); ++i) {
            const auto path = indexed("playing.hammers", i) + ".note";
            if (!playing.hammers[i].note.empty())
                note(path, playing.hammers[i].note);
            if (i > 0 && tuning::noteNumber(playing.hammers[i].note) <= tuning::noteNumber(playing.hammers[i - 1].note))
                add(path, " = " + quoted(playing.hammers[i].note) + ": hammers go up the compass, one a note");
        }
        if (playing.heightMm && isSaid(playing, forceKey()))
            add("playing.height_mm", " stands beside force_n: give one of the two");
        if (playing.channelPerCourse && instrument_.courses.size() > 16)
            add("playing.channel_per_course", " = true: there are 16 channels, and the instrument has " +
                                                  std::to_string(instrument_.courses.size()) + " courses");
    }

    static std::size_t forceKey() {
        const auto& fields = table<Playing>().fields;
        return static_cast<std::size_t>(
            std::find_if(fields.begin(), fields.end(), [](const auto& f) { return f.key == "force_n"; }) - fields.begin());
    }

    const Instrument& instrument_;
    std::set<std::string> materials_;
    std::vector<std::string> bridges_;
    Problems problems_;
};

} // namespace

Problems brokenRules(const Instrument& instrument) { return Rules(instrument).check(); }

std::optional<int> noteOf(const Course& course) {
    return course.note ? tuning::noteNumber(*course.note) : std::nullopt;
}

Course stringOf(const Course& course, std::size_t string) {
    if (string >= course.each.size())
        return course;
    auto base = course;
    const auto& one = course.each[string];
    if (one.note || one.pitchHz || one.tensionN)
        base.note.reset(), base.pitchHz.reset(), base.tensionN.reset();
    return overlaid(std::move(base), one);
}

} // namespace hitchpin::document
