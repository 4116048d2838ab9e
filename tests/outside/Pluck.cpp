#include "dsp/analysis/Measure.h"
#include "dsp/engine/Engine.h"

#include <cmath>
#include <cstdio>
#include <vector>

int main() {
    using namespace hitchpin;
    string::Description wire;
    wire.speakingLength = 0.65;
    wire.build.core = {*string::findBuiltInMaterial("music wire"), 0.0004};
    const auto strung = string::strungToPitch(wire, 220.0);
    if (!strung)
        return std::puts(strung.error().message.c_str()), 1;
    design::InstrumentDescription instrument;
    instrument.boards.resize(1);
    instrument.bridges.resize(1);
    instrument.courses.resize(1);
    instrument.courses[0].strings = {*strung};
    const auto design = design::makeInstrument(instrument, {48000.0});
    if (!design)
        return std::puts(design.error().message.c_str()), 1;

    engine::Engine engine(*design);
    engine.pluck(0, {});
    std::vector<double> sound(48000);
    engine.process(sound.data(), nullptr, static_cast<int>(sound.size()));
    const auto partial = analysis::measurePartials(sound, 48000.0, std::vector{220.0, 440.0}).front();
    const double cents = analysis::centsBetween(partial.frequency, 220.0);
    std::printf("first partial %.6f Hz (%+.6f cents), %.3f N, T60 %.2f s\n", partial.frequency, cents,
                partial.amplitude, partial.t60);
    return partial.amplitude > 0.01 && std::abs(cents) <= 0.05 ? 0 : 1;
}
