// Measures that need a quiet machine or a human eye, and so are no tests. Times are printed in milliseconds
// and as ratios to one fixed piece of arithmetic in the same run, which compares better from machine to
// machine.
#include "dsp/design/MakeLoop.h"
#include "dsp/design/MakePlace.h"
#include "tests/support/YardstickStrings.h"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <ctime>
#include <vector>

using namespace hitchpin;

namespace {

/// Of processor time: others use the machine too.
template <class Work>
double milliseconds(Work work) {
    const std::clock_t start = std::clock();
    work();
    return 1e3 * static_cast<double>(std::clock() - start) / CLOCKS_PER_SEC;
}

template <class Work>
double medianOf(int times, Work work) {
    std::vector<double> all;
    for (int i = 0; i < times; ++i)
        all.push_back(milliseconds(work));
    std::nth_element(all.begin(), all.begin() + times / 2, all.end());
    return all[static_cast<std::size_t>(times / 2)];
}

double sumOfSines() {
    double sum = 0.0;
    for (int i = 0; i < 100000; ++i)
        sum += std::sin(1e-3 * i);
    return sum;
}

} // namespace

int main() {
    volatile double kept = 0.0;
    const double unit = medianOf(9, [&] { kept = sumOfSines(); });
    std::printf("unit: 100000 sines, %.3f ms\n\n", unit);
    std::printf("%-20s %-10s %8s %8s %8s %8s  %2s %7s %9s %8s %7s\n", "string, 48 kHz", "quality", "make ms",
                "units", "retune", "units", "K", "shelves", "to Hz", "cents", "T60 %");
    for (const auto quality : {design::Quality::live, design::Quality::reference}) {
        for (const auto& string : yardstick::strings()) {
            const design::LoopSettings settings{48000.0, quality};
            const string::Partials partials = string.partials(), other = string.partials(0.7);
            const auto loop = design::makeLoop(partials, settings);
            if (!loop) {
                std::printf("%-20s %s\n", string.name, loop.error().message.c_str());
                continue;
            }
            const int times = quality == design::Quality::live ? 7 : 3;
            const double make = medianOf(times, [&] { kept = design::makeLoop(partials, settings)->gain; });
            const double retune =
                medianOf(times, [&] { kept = design::retuneLoop(*loop, other, settings)->gain; });
            std::printf("%-20s %-10s %8.2f %8.1f %8.2f %8.2f  %2zu %7zu %9.0f %8.3f %7.2f\n", string.name,
                        quality == design::Quality::live ? "live" : "reference", make, make / unit, retune,
                        retune / unit, loop->sections.size(), loop->shelves.size(), loop->accuracy.coverageHz,
                        loop->accuracy.worstCents, 100.0 * loop->accuracy.worstT60Error);
        }
    }

    std::printf("\n%-20s %-10s %8s %8s %8s %8s  %2s %8s %9s\n", "plucked at 0.2", "quality", "make ms", "units",
                "again", "units", "K", "level dB", "missing dB");
    for (const auto quality : {design::Quality::live, design::Quality::reference}) {
        for (const auto& string : yardstick::strings()) {
            const design::LoopSettings settings{48000.0, quality};
            const string::Partials partials = string.partials(), other = string.partials(0.7);
            const auto loop = design::makeLoop(partials, settings);
            if (!loop)
                continue;
            const auto retuned = design::retuneLoop(*loop, other, settings);
            const auto place = design::makePlace(partials, *loop, design::PlaceUse::plucked, 0.2);
            const double make = medianOf(
                5, [&] { kept = design::makePlace(partials, *loop, design::PlaceUse::plucked, 0.2).gain; });
            const double again = medianOf(
                5, [&] { kept = design::makePlace(other, *retuned, design::PlaceUse::plucked, 0.2, &place).gain; });
            std::printf("%-20s %-10s %8.2f %8.1f %8.2f %8.2f  %2zu %8.3f %9.1f\n", string.name,
                        quality == design::Quality::live ? "live" : "reference", make, make / unit, again, again / unit,
                        place.sections.size(), place.accuracy.worstLevelDb, place.accuracy.worstNullDb);
        }
    }
}
