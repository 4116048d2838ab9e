#include "Source/document/Strung.h"

#include "dsp/tuning/Notes.h"

#include <cmath>

namespace hitchpin::document {

namespace {

constexpr double mm = 1e-3;
constexpr double defaultPluckRatio = 0.2;
constexpr double defaultStrikeRatio = 0.125; // 1/8, common practice of hammers

string::Material toSi(const std::string& name, const Material& from) {
    string::Material to;
    to.name = name;
    to.density = from.densityKgM3;
    to.youngsModulus = from.youngsModulusGpa * 1e9;
    to.slowModulus = from.slowModulusGpa.value_or(from.youngsModulusGpa) * 1e9;
    to.tensileStrength = from.tensileStrengthMpa * 1e6;
    for (const auto& [diameter, strength] : from.strengthByDiameter)
        to.strengthByDiameter.push_back({diameter * mm, strength * 1e6});
    to.workingShare = from.workingShare;
    to.fill = from.fill;
    to.bendingLoss = from.bendingLoss;
    to.constantLoss = from.constantLoss;
    to.expansionPerKelvin = from.expansionPerK;
    to.remarks = from.remarks;
    return to;
}

string::Description toSi(const Course& from, const Instrument& instrument) {
    string::Description to;
    to.speakingLength = from.speakingLengthMm * mm;
    to.build.core.material = materialNamed(from.core.material, instrument).value_or(string::Material{});
    to.build.core.diameter = from.core.diameterMm * mm;
    to.build.core.shape = static_cast<string::CoreShape>(from.core.shape);
    to.build.core.measured = static_cast<string::Measured>(from.core.measured);
    for (const auto& winding : from.windings) {
        string::Winding w;
        w.material = materialNamed(winding.material, instrument).value_or(string::Material{});
        w.shape = static_cast<string::WindingShape>(winding.shape);
        w.diameter = winding.diameterMm.value_or(0.0) * mm;
        w.thickness = winding.thicknessMm.value_or(0.0) * mm;
        w.width = winding.widthMm.value_or(0.0) * mm;
        w.bareAtNut = winding.bareMm[0] * mm;
        w.bareAtBridge = winding.bareMm[1] * mm;
        w.loss = winding.loss;
        to.build.windings.push_back(std::move(w));
    }
    if (from.linearDensityGM)
        to.build.linearDensity = *from.linearDensityGM * 1e-3;
    to.build.bendingStiffness = from.bendingStiffnessNM2;
    to.ends = {static_cast<string::End>(from.ends.nut), static_cast<string::End>(from.ends.bridge)};
    return to;
}

double geometric(double a, double b, double t) { return a > 0 && b > 0 ? a * std::pow(b / a, t) : std::lerp(a, b, t); }

std::optional<double> geometric(const std::optional<double>& a, const std::optional<double>& b, double t) {
    return a && b ? std::optional(geometric(*a, *b, t)) : std::nullopt;
}

} // namespace

std::optional<string::Material> materialNamed(const std::string& name, const Instrument& instrument) {
    for (const auto& [own, material] : instrument.materials)
        if (own == name)
            return toSi(own, material);
    const auto* builtIn = string::findBuiltInMaterial(name);
    return builtIn != nullptr ? std::optional(*builtIn) : std::nullopt;
}

double pitchOf(const Course& course, const tuning::Tuning& tuning) {
    const double hz = course.pitchHz ? *course.pitchHz : tuning.frequency(tuning::noteNumber(course.note.value()).value());
    return hz * std::exp2(course.cents / 1200.0);
}

Result<string::Strung> tuned(const Course& course, double detuneCents, const tuning::Tuning& tuning,
                             const Instrument& instrument, int partialCount) {
    const auto description = toSi(course, instrument);
    const double detune = std::exp2(detuneCents / 1200.0);
    if (!course.tensionN)
        return string::strungToPitch(description, pitchOf(course, tuning) * detune, partialCount);
    // A string given by its tension sounds what follows; cents then move it from there.
    const double off = detune * std::exp2(course.cents / 1200.0);
    auto strung = string::strungToTension(description, *course.tensionN, partialCount);
    if (!strung || off == 1.0)
        return strung;
    return string::strungToPitch(description, strung->partials.frequency(1) * off, partialCount);
}

double pluckRatioOf(const Course& course, With with) {
    const bool struck = with == With::felt || with == With::tangent;
    if (struck)
        return 1.0 - course.strikeRatio.value_or(defaultStrikeRatio);
    if (course.pluckRatio)
        return *course.pluckRatio;
    if (course.pluckPointMm)
        return *course.pluckPointMm / course.speakingLengthMm;
    return course.strikeRatio ? 1.0 - *course.strikeRatio : defaultPluckRatio;
}

Course strungBetween(const Course& low, const Course& high, double t, const Instrument& instrument) {
    auto course = t < 0.5 ? low : high;
    course.note.reset(), course.pitchHz.reset(), course.tensionN.reset();
    course.cents = std::lerp(low.cents, high.cents, t);
    course.speakingLengthMm = geometric(low.speakingLengthMm, high.speakingLengthMm, t);
    if (low.core.material == high.core.material && low.core.shape == high.core.shape)
        course.core.diameterMm = geometric(low.core.diameterMm, high.core.diameterMm, t);
    bool woundAlike = low.windings.size() == high.windings.size();
    for (std::size_t w = 0; woundAlike && w < low.windings.size(); ++w)
        woundAlike = low.windings[w].material == high.windings[w].material &&
                     low.windings[w].shape == high.windings[w].shape;
    for (std::size_t w = 0; w < course.windings.size(); ++w) {
        auto& winding = course.windings[w];
        if (woundAlike) {
            const auto &a = low.windings[w], &b = high.windings[w];
            winding.diameterMm = geometric(a.diameterMm, b.diameterMm, t);
            winding.thicknessMm = geometric(a.thicknessMm, b.thicknessMm, t);
            winding.widthMm = geometric(a.widthMm, b.widthMm, t);
            for (std::size_t end = 0; end < 2; ++end)
                winding.bareMm[end] = std::lerp(a.bareMm[end], b.bareMm[end], t);
            winding.loss = std::lerp(a.loss, b.loss, t);
        } else {
            // The nearer build keeps its bare ends in proportion.
            const double scale = course.speakingLengthMm / (t < 0.5 ? low : high).speakingLengthMm;
            for (auto& bare : winding.bareMm)
                bare *= scale;
        }
    }
    course.linearDensityGM = geometric(low.linearDensityGM, high.linearDensityGM, t);
    course.bendingStiffnessNM2 = geometric(low.bendingStiffnessNM2, high.bendingStiffnessNM2, t);
    course.each.clear(); // what differs between strings is given in absolute measures
    const auto with = instrument.playing.with;
    course.pluckPointMm.reset();
    course.pluckRatio = std::lerp(pluckRatioOf(low, with), pluckRatioOf(high, with), t);
    course.strikeRatio = 1.0 - *course.pluckRatio;
    course.remarks.clear();
    return course;
}

} // namespace hitchpin::document
