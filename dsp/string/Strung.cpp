#include "dsp/string/Strung.h"

#include "dsp/string/BareEnds.h"
#include "dsp/string/FrequencyDeterminant.h"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <optional>

namespace hitchpin::string {
namespace {

constexpr double pi = std::numbers::pi;

bool usable(double value) { return std::isfinite(value) && value > 0.0; }

/// Why no string can be made of this, or nothing. Messages name the measure; the layer above names the place.
std::optional<Failure> faultIn(const Description& description) {
    const Build& build = description.build;
    const Material& material = build.core.material;
    if (!usable(description.speakingLength))
        return Failure{"the speaking length must be over 0"};
    if (!usable(build.core.diameter))
        return Failure{"the core's diameter must be over 0"};
    if (build.core.diameter > 0.2 * description.speakingLength)
        return Failure{"the core is thicker than a fifth of the speaking length: a bar, not a string"};
    if (!usable(material.density) || !usable(material.youngsModulus) || !usable(material.slowModulus) ||
        !usable(material.fill) || material.fill > 1.0)
        return Failure{"the core's material needs density, moduli and a fill of at most 1, all over 0"};
    if (!usable(material.strengthAt(build.core.diameter)))
        return Failure{"the core's material needs a tensile strength over 0"};
    if (build.windings.size() > 2)
        return Failure{"a string has at most two windings"};
    for (const Winding& winding : build.windings) {
        const bool round = winding.shape == WindingShape::round;
        if (!(round ? usable(winding.diameter) : usable(winding.thickness) && usable(winding.width)))
            return Failure{round ? "a winding's diameter must be over 0"
                                 : "a flat winding's thickness and width must be over 0"};
        if (!usable(winding.material.density))
            return Failure{"a winding's material needs a density over 0"};
        if (!(winding.bareAtNut >= 0.0) || !(winding.bareAtBridge >= 0.0) ||
            winding.bareAtNut + winding.bareAtBridge >= description.speakingLength)
            return Failure{"the bare ends of a winding must leave some of the speaking length wound"};
    }
    if (build.linearDensity && !usable(*build.linearDensity))
        return Failure{"a weighed linear density must be over 0"};
    if (build.bendingStiffness && !(std::isfinite(*build.bendingStiffness) && *build.bendingStiffness >= 0.0))
        return Failure{"a measured bending stiffness must be at least 0"};
    return std::nullopt;
}

/// What the tension does to the string: strain ε by the slow modulus. Measures taken slack thin by it at constant
/// volume: area and mass a metre by 1/(1+ε), bending stiffness (∝ area²) by its square. A weighed or measured
/// override is one of the string as it was weighed, and follows the same rule for the mass alone.
struct AtTension {
    double strain, linearDensity, area, bendingStiffness;
};

AtTension atTension(const Build& build, double tension) {
    const double area = coreArea(build), strain = tension / (build.core.material.slowModulus * area);
    const double thinner = build.core.measured == Measured::slack ? 1.0 / (1.0 + strain) : 1.0;
    return {strain, linearDensity(build) * thinner, area * thinner,
            coreBendingStiffness(build) * (build.bendingStiffness ? 1.0 : thinner * thinner)};
}

/// The bare ends of the windings as steps of mass, in shares of length and of the wound mass.
MassSteps bareSteps(const Description& description) {
    const Build& build = description.build;
    MassSteps steps;
    double computed = coreLinearDensity(build);
    for (std::size_t i = 0; i < build.windings.size(); ++i)
        computed += windingLinearDensity(build, i);
    // A second winding lies on the first: where the first is bare, so is the second.
    double nut = 0.0, bridge = 0.0;
    for (std::size_t i = 0; i < build.windings.size(); ++i) {
        const Winding& winding = build.windings[i];
        nut = std::max(nut, winding.bareAtNut);
        bridge = std::max(bridge, winding.bareAtBridge);
        if (nut <= 0.0 && bridge <= 0.0)
            continue;
        const double lack = windingLinearDensity(build, i) / computed;
        steps.push_back({nut / description.speakingLength, bridge / description.speakingLength, lack, lack});
    }
    return steps;
}

double harmonicF0(double tension, double density, double length) { return std::sqrt(tension / density) / (2.0 * length); }

double inharmonicityOf(double bendingStiffness, double tension, double length) {
    return pi * pi * bendingStiffness / (tension * length * length);
}

/// f_n/F0 for n = 1…count where the hinged law does not hold as it is; empty where it does. Bare ends and the
/// conditions of the ends are solved each for itself and multiplied: exact where one of them is absent, and good to
/// the product of two small effects where both are there.
std::vector<double> ratiosOverF0(double inharmonicity, const Ends& ends, const MassSteps& steps, int count) {
    if (steps.empty())
        return {};
    std::vector<double> ratios = steppedRatios(inharmonicity, steps, count);
    if (ends.nut == End::hinged && ends.bridge == End::hinged)
        return ratios;
    const std::vector<double> byEnds = partialRatios(inharmonicity, ends, count);
    for (int n = 1; n <= count; ++n)
        ratios[static_cast<std::size_t>(n - 1)] *=
            byEnds[static_cast<std::size_t>(n - 1)] / (n * std::sqrt(1.0 + inharmonicity * n * n));
    return ratios;
}

double firstRatio(double inharmonicity, const Ends& ends, const MassSteps& steps) {
    if (!steps.empty())
        return ratiosOverF0(inharmonicity, ends, steps, 1).front();
    return partialRatios(inharmonicity, ends, 1).front();
}

Losses lossesOf(const Build& build, double density) {
    Losses losses;
    losses.bendingLoss = build.core.material.bendingLoss;
    losses.constantLoss = build.core.material.constantLoss;
    for (const Winding& winding : build.windings)
        losses.constantLoss += winding.loss;
    losses.outerRadius = 0.5 * outerDiameter(build);
    losses.linearDensity = density;
    return losses;
}

Strung strungAt(const Description& description, double tension, int partialCount) {
    const Build& build = description.build;
    const auto [strain, density, area, stiffness] = atTension(build, tension);
    const double length = description.speakingLength, f0 = harmonicF0(tension, density, length);
    const double b = inharmonicityOf(stiffness, tension, length);
    const Losses losses = lossesOf(build, density);

    Strung strung;
    strung.description = description;
    Statics& s = strung.statics;
    s.inharmonicity = b;
    std::vector<double> frequencies = ratiosOverF0(b, description.ends, bareSteps(description), partialCount);
    if (frequencies.empty()) {
        strung.partials = Partials(f0, b, description.ends, losses, partialCount);
    } else {
        for (double& f : frequencies)
            f *= f0;
        if (!description.ends.oneFree())
            s.inharmonicity = effectiveInharmonicity(frequencies);
        strung.partials = Partials(std::move(frequencies), f0, b, description.ends, losses);
    }
    s.linearDensity = density;
    s.tension = tension;
    s.stress = tension / area;
    s.breakingLoad = build.core.material.strengthAt(build.core.diameter) * coreArea(build);
    s.breakingShare = tension / s.breakingLoad;
    s.semitonesToBreaking = 6.0 * std::log2(1.0 / s.breakingShare);
    s.stretch = length * strain / (1.0 + strain);
    s.bendingStiffness = stiffness;
    s.impedance = std::sqrt(tension * density);
    s.longitudinalHz = std::sqrt(build.core.material.youngsModulus * area / density) / (2.0 * length);
    s.outerDiameter = outerDiameter(build);
    return strung;
}

/// T for which f1 is as wanted, by f1² = T/(4μL²)·ratio²(B): fixed point in T, since μ, B and the ratio move
/// little with it. nullopt where stiffness alone already gives more than the wanted pitch.
std::optional<double> tensionFor(const Description& description, double firstPartialHz) {
    const MassSteps steps = bareSteps(description);
    const double length = description.speakingLength;
    const auto pitchAt = [&](double tension) {
        const AtTension state = atTension(description.build, tension);
        return harmonicF0(tension, state.linearDensity, length) *
               firstRatio(inharmonicityOf(state.bendingStiffness, tension, length), description.ends, steps);
    };
    // Secant on log f against log T, whose slope is near ½; started from the string without stiffness.
    const double half = description.ends.oneFree() ? 2.0 : 1.0;
    const double loop = 2.0 * half * length * firstPartialHz;
    double t0 = linearDensity(description.build) * loop * loop;
    double e0 = std::log(pitchAt(t0) / firstPartialHz), slope = 0.5;
    for (int i = 0; i < 60; ++i) {
        if (std::abs(e0) < 1e-14)
            return t0;
        const double t1 = t0 * std::exp(std::clamp(-e0 / slope, -1.0, 1.0));
        if (!usable(t1) || t1 < 1e-9)
            return std::nullopt;
        const double e1 = std::log(pitchAt(t1) / firstPartialHz);
        const double seen = (e1 - e0) / std::log(t1 / t0);
        if (std::isfinite(seen) && seen > 0.01)
            slope = seen;
        if (t1 == t0)
            return t0;
        t0 = t1;
        e0 = e1;
    }
    return std::abs(e0) < 1e-9 ? std::optional(t0) : std::nullopt;
}

} // namespace

Result<Strung> strungToTension(const Description& description, double tension, int partialCount) {
    if (auto fault = faultIn(description))
        return *fault;
    if (!usable(tension))
        return Failure{"the tension must be over 0"};
    return strungAt(description, tension, std::max(1, partialCount));
}

Result<Strung> strungToPitch(const Description& description, double firstPartialHz, int partialCount) {
    if (auto fault = faultIn(description))
        return *fault;
    if (!usable(firstPartialHz))
        return Failure{"the pitch must be over 0"};
    const auto tension = tensionFor(description, firstPartialHz);
    if (!tension)
        return Failure{"no tension gives this pitch: the string is too thick for its length"};
    return strungAt(description, *tension, std::max(1, partialCount));
}

Result<Strung> cutToPitch(const Description& description, double firstPartialHz, double tension, int partialCount) {
    if (!usable(firstPartialHz) || !usable(tension))
        return Failure{"pitch and tension must be over 0"};
    Description cut = description;
    // f·L is constant but for stiffness and ends: start without them and follow the ratio found.
    cut.speakingLength = 1.0;
    if (auto fault = faultIn(cut))
        return *fault;
    const double density = atTension(cut.build, tension).linearDensity;
    cut.speakingLength = std::sqrt(tension / density) / (firstPartialHz * (cut.ends.oneFree() ? 4.0 : 2.0));
    for (int i = 0; i < 100; ++i) {
        if (auto fault = faultIn(cut))
            return *fault;
        const AtTension state = atTension(cut.build, tension);
        const double b = inharmonicityOf(state.bendingStiffness, tension, cut.speakingLength);
        const double pitch = harmonicF0(tension, density, cut.speakingLength) * firstRatio(b, cut.ends, bareSteps(cut));
        const double change = pitch / firstPartialHz;
        cut.speakingLength *= change;
        if (std::abs(change - 1.0) < 1e-15)
            break;
    }
    return strungAt(cut, tension, std::max(1, partialCount));
}

Result<Strung> drawnToPitch(const Description& description, double firstPartialHz, double tension, int partialCount) {
    if (!usable(firstPartialHz) || !usable(tension))
        return Failure{"pitch and tension must be over 0"};
    if (!description.build.windings.empty() || description.build.linearDensity)
        return Failure{"a diameter can be found for a plain string that was not weighed"};
    Description drawn = description;
    const double loop = (drawn.ends.oneFree() ? 4.0 : 2.0) * drawn.speakingLength * firstPartialHz;
    drawn.build.core.diameter = 1e-3;
    if (auto fault = faultIn(drawn))
        return *fault;
    // μ ∝ d² at held tension, f ∝ 1/d: follow the ratio found, as for the length.
    drawn.build.core.diameter *= std::sqrt(tension / (loop * loop) / linearDensity(drawn.build));
    for (int i = 0; i < 100; ++i) {
        if (auto fault = faultIn(drawn))
            return *fault;
        const AtTension state = atTension(drawn.build, tension);
        const double b = inharmonicityOf(state.bendingStiffness, tension, drawn.speakingLength);
        const double pitch =
            harmonicF0(tension, state.linearDensity, drawn.speakingLength) * firstRatio(b, drawn.ends, {});
        const double change = pitch / firstPartialHz;
        drawn.build.core.diameter *= change;
        if (std::abs(change - 1.0) < 1e-15)
            break;
    }
    return strungAt(drawn, tension, std::max(1, partialCount));
}

/// At held ends ΔT = −E·S·(α − α_frame)·Δθ, so that Δf/f = −((α − α_frame)·E/2σ)·Δθ to first order (rigid frame:
/// The Science of String Instruments, eq. 21.1). The strain is what is kept: thermal growth takes it from the pull.
Result<Strung> atTemperature(const Strung& strung, double kelvin, double frameExpansionPerKelvin) {
    const Core& core = strung.description.build.core;
    const double area = coreArea(strung.description.build);
    const double tension = strung.statics.tension - core.material.slowModulus * area *
                                                        (core.material.expansionPerKelvin - frameExpansionPerKelvin) * kelvin;
    if (!usable(tension))
        return Failure{"this warmth would leave the string without tension"};
    Description there = strung.description;
    there.speakingLength *= 1.0 + frameExpansionPerKelvin * kelvin;
    return strungToTension(there, tension);
}

/// Pressing a string down stretches it; that sharpening is not counted here. A stop cuts off the nut's side, with
/// its bare end and its condition: a fret or a finger is a hinge.
Result<Strung> stoppedAt(const Strung& strung, double speakingShare) {
    if (!(speakingShare > 0.0) || speakingShare > 1.0)
        return Failure{"a stop must leave more than none and at most all of the string"};
    if (speakingShare == 1.0)
        return strung;
    Description stopped = strung.description;
    const double cutOff = (1.0 - speakingShare) * stopped.speakingLength;
    stopped.speakingLength -= cutOff;
    stopped.ends.nut = End::hinged;
    for (Winding& winding : stopped.build.windings)
        winding.bareAtNut = std::max(0.0, winding.bareAtNut - cutOff);
    return strungToTension(stopped, strung.statics.tension);
}

} // namespace hitchpin::string
