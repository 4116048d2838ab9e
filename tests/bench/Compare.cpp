// How near this library's loops come to a string's partials and decays, beside two methods that are usual for the
// same string. Prints a table in Markdown. Everything is judged by exact poles, never by ear or by a simulation.
#include "dsp/design/LoopReport.h"
#include "dsp/design/MakeLoop.h"
#include "tests/support/YardstickStrings.h"

#include <algorithm>
#include <chrono>
#include <cmath>
#include <complex>
#include <cstdio>
#include <functional>
#include <limits>
#include <numbers>
#include <optional>
#include <string>
#include <vector>

using namespace hitchpin;

namespace {

using Complex = std::complex<double>;
constexpr double pi = std::numbers::pi, sampleRate = 48000.0, partialsTo = 10000.0, decayTo = 6000.0;
constexpr double none = std::numeric_limits<double>::quiet_NaN();

/// What a string asks for. `near` partials are those that the live design covers, the same for every method.
struct Task {
    string::Partials partials;
    std::vector<double> hz, decay; ///< of partials 1, 2, … up to 10 kHz or number 120
    std::size_t near = 0;
    std::size_t decays = 0; ///< of those, up to 6 kHz
};

struct Pole {
    double hz, decay;
};
/// Poles a method has for the partials of a task; NaN where it has none.
using Poles = std::vector<Pole>;

double cents(double a, double b) { return std::abs(1200.0 * std::log2(a / b)); }

double worstCents(const Task& task, const Poles& poles, std::size_t count) {
    double worst = 0.0;
    for (std::size_t i = 0; i < count; ++i) {
        const double off = cents(poles[i].hz, task.hz[i]);
        worst = std::isnan(off) ? std::numeric_limits<double>::infinity() : std::max(worst, off);
    }
    return worst;
}

double worstT60(const Task& task, const Poles& poles) {
    double worst = 0.0;
    for (std::size_t i = 0; i < task.decays; ++i)
        worst = std::max(worst, std::abs(task.decay[i] / poles[i].decay - 1.0));
    return worst;
}

/// The x with the least value: by a grid even in ln x, then golden section around its best point.
double leastOver(double from, double to, int points, const std::function<double(double)>& valueAt) {
    const double step = std::log(to / from) / (points - 1);
    int best = 0;
    double least = std::numeric_limits<double>::infinity();
    for (int i = 0; i < points; ++i)
        if (const double value = valueAt(from * std::exp(i * step)); value < least) {
            least = value;
            best = i;
        }
    double low = std::log(from) + (best - 1) * step, high = low + 2.0 * step;
    const double golden = 0.5 * (std::sqrt(5.0) - 1.0);
    for (int i = 0; i < 40; ++i) {
        const double a = high - golden * (high - low), b = low + golden * (high - low);
        if (valueAt(std::exp(a)) < valueAt(std::exp(b)))
            high = b;
        else
            low = a;
    }
    return std::exp(0.5 * (low + high));
}

// This library ---------------------------------------------------------------------------------------------------

std::optional<Poles> ours(const Task& task, design::Quality quality) {
    const auto loop = design::makeLoop(task.partials, {sampleRate, quality});
    if (!loop)
        return std::nullopt;
    design::LoopPlan plan;
    plan.coveredPartial = static_cast<int>(task.hz.size());
    Poles poles(task.hz.size(), {none, none});
    for (const auto& at : design::measureLoop(design::modelOf(*loop), task.partials, sampleRate, plan).partials)
        if (const auto i = static_cast<std::size_t>(at.number - 1); i < poles.size())
            poles[i] = {at.targetHz * std::exp2(at.cents / 1200.0), task.decay[i] / at.t60Ratio};
    return poles;
}

// A cascade of equal first-order allpasses and a one-pole loss ----------------------------------------------------

/// Van Duyne and Smith (ICMC 1994): M sections (a + z⁻¹)/(1 + a·z⁻¹), here by d = (1−a)/(1+a), with the loss filter
/// g·(1+b)/(1+b·z⁻¹) of Välimäki, Huopaniemi, Karjalainen and Jánosy (JAES 1996). The delay line is given an ideal
/// fraction, which no real one has, and its length makes the first partial exact.
struct Cascade {
    int sections = 0;
    double d = 1.0;
    double g = 1.0, b = 0.0;
    double delay = 0.0;

    Complex logFilters(Complex p) const {
        const Complex s = std::tanh(0.5 * p), upper = 1.0 - d * s, lower = 1.0 + d * s;
        return static_cast<double>(sections) * (std::log(upper) - std::log(lower)) +
               std::log(g * (1.0 + b)) - std::log(1.0 + b * std::exp(-p));
    }

    /// False where the filters are longer than the string.
    bool tune(const Task& task) {
        Complex p(-task.decay[0] / sampleRate, 2.0 * pi * task.hz[0] / sampleRate);
        for (int i = 0; i < 30; ++i) {
            const Complex filters = logFilters(p);
            delay = (2.0 * pi + filters.imag()) / p.imag();
            if (!(delay >= 1.0))
                return false;
            p = {filters.real() / delay, p.imag()};
        }
        return true;
    }

    Poles poles(const Task& task) const {
        Poles found;
        double lastRatio = 1.0;
        for (std::size_t i = 0; i < task.hz.size(); ++i) {
            Complex p(-task.decay[i] / sampleRate, 2.0 * pi * task.hz[i] * lastRatio / sampleRate);
            const auto miss = [&](Complex at) {
                return logFilters(at) - delay * at + Complex(0.0, 2.0 * pi * static_cast<double>(i + 1));
            };
            bool there = false;
            for (int k = 0; k < 60 && !there; ++k) {
                const double h = 1e-6;
                const Complex step = -miss(p) * (2.0 * h) / (miss(p + h) - miss(p - h));
                p += step;
                there = std::abs(step) < 1e-12;
            }
            if (!there || !(p.imag() > 0.0 && p.imag() < pi)) {
                found.push_back({none, none});
                continue;
            }
            found.push_back({p.imag() * sampleRate / (2.0 * pi), -p.real() * sampleRate});
            lastRatio = found.back().hz / task.hz[i];
        }
        return found;
    }

    /// The one-pole that errs least in T60, by search: better than the closed fits in use.
    void fitLoss(const Task& task) {
        std::vector<double> wanted, angle; // nepers once round, with the string's own delay
        for (std::size_t i = 0; i < task.decays; ++i) {
            wanted.push_back(task.decay[i] / task.partials.slope(static_cast<double>(i + 1)));
            angle.push_back(2.0 * pi * task.hz[i] / sampleRate);
        }
        double bestGain = 1.0;
        const auto errorAt = [&](double openness) {
            std::vector<double> filter;
            for (const double w : angle)
                filter.push_back(std::log(std::abs(1.0 + (openness - 1.0) * std::polar(1.0, -w)) / openness));
            const auto errorWith = [&](double constant) {
                double worst = 0.0;
                for (std::size_t i = 0; i < wanted.size(); ++i)
                    worst = std::max(worst, std::abs(wanted[i] / (constant + filter[i]) - 1.0));
                return worst;
            };
            const double constant = leastOver(1e-6, 1.0, 24, errorWith);
            bestGain = std::exp(-constant);
            return errorWith(constant);
        };
        const double openness = leastOver(0.02, 0.999999, 32, errorAt);
        errorAt(openness);
        g = bestGain;
        b = openness - 1.0;
    }
};

/// Rauhala and Välimäki, "Tunable dispersion filter design for piano synthesis", IEEE Signal Processing Letters 13:253
/// (2006), in its form for M first-order sections; M = 4. Constants from memory; made for pianos at 44.1 kHz, and moved
/// here to the same place in Hz.
std::optional<Poles> closedFormCascade(const Task& task) {
    constexpr int sections = 4;
    const double b = std::log(std::max(task.partials.inharmonicity(), 1e-6)), m = std::log(sections);
    const double key = 12.0 * std::log2(task.hz[0] / 27.5) + 1.0;
    const double kd = std::exp(-0.00179 * b * b - 0.0233 * b - 2.93);
    const double cd = std::exp((0.0126 * m + 0.0606) * b - 0.00825 * m + 1.97);
    Cascade cascade;
    cascade.sections = sections;
    cascade.d = std::exp(cd - key * kd) * sampleRate / 44100.0;
    cascade.fitLoss(task);
    return cascade.tune(task) ? std::optional(cascade.poles(task)) : std::nullopt;
}

/// The best that such a cascade can do with up to `most` sections: their number and constant by search.
std::optional<Poles> searchedCascade(const Task& task, int most) {
    Cascade base;
    base.fitLoss(task);
    std::optional<Poles> best;
    double least = std::numeric_limits<double>::infinity();
    for (int sections = 1; sections <= most; ++sections) {
        const auto with = [&](double d) {
            Cascade cascade = base;
            cascade.sections = sections;
            cascade.d = d;
            return cascade.tune(task) ? std::optional(cascade.poles(task)) : std::nullopt;
        };
        const auto errorOf = [&](const std::optional<Poles>& poles) {
            return poles ? worstCents(task, *poles, task.near) : std::numeric_limits<double>::infinity();
        };
        const auto poles = with(leastOver(1.0, 200.0, 24, [&](double d) { return errorOf(with(d)); }));
        if (const double error = errorOf(poles); error < least) {
            least = error;
            best = poles;
        }
    }
    return best;
}

// An explicit finite-difference scheme -----------------------------------------------------------------------------

/// Chaigne and Askenfelt (JASA 95:1112, 1994) with the losses of Bensa et al. (JASA 114:1095, 2003), as Bilbao writes
/// it (Numerical Sound Synthesis, ch. 7): δtt·u = c²·δxx·u − κ²·δxxxx·u − 2σ0·δt.u + 2σ1·δt₋δxx·u on a length of 1.
/// With hinged ends its modes are sin(nπl/N), so that with q = (4/h²)·sin²(nπ/2N) each has the poles of
///     (1 + σ0k)·z² + (k²(c²q + κ²q²) + 2σ1kq − 2)·z + (1 − σ0k − 2σ1kq) = 0.
/// h = 1/N is as small as stability allows, 2h² ≥ c²k² + 4σ1k + √((c²k² + 4σ1k)² + 16κ²k²), where it disperses least,
/// or one of the next few steps, whichever does best.
std::optional<Poles> finiteDifferences(const Task& task) {
    constexpr double k = 1.0 / sampleRate;
    // σ = σ0 + σ1·(nπ)² with the least error in T60: for a given σ1/σ0 the best σ0 has a closed form.
    double sigma0 = 0.0, sigma1 = 0.0;
    const auto errorAt = [&](double ratio) {
        double highest = 0.0, lowest = std::numeric_limits<double>::infinity();
        for (std::size_t i = 0; i < task.decays; ++i) {
            const double n = static_cast<double>(i + 1), shape = 1.0 + ratio * n * n * pi * pi;
            highest = std::max(highest, task.decay[i] / shape);
            lowest = std::min(lowest, task.decay[i] / shape);
        }
        sigma0 = 0.5 * (highest + lowest);
        sigma1 = ratio * sigma0;
        return (highest - lowest) / (highest + lowest);
    };
    errorAt(leastOver(1e-9, 10.0, 200, errorAt));

    const auto at = [&](double f0, double fewer) -> std::optional<Poles> {
        const double c = 2.0 * f0, kappa = 2.0 * f0 * std::sqrt(task.partials.inharmonicity()) / pi;
        const double part = c * c * k * k + 4.0 * sigma1 * k;
        const double hLeast = std::sqrt(0.5 * (part + std::sqrt(part * part + 16.0 * kappa * kappa * k * k)));
        const double n = std::floor(1.0 / hLeast) - fewer;
        if (n < 2.0)
            return std::nullopt;
        Poles poles;
        for (std::size_t i = 0; i < task.hz.size(); ++i) {
            const double number = static_cast<double>(i + 1), sine = std::sin(0.5 * number * pi / n);
            if (number >= n) {
                poles.push_back({none, none});
                continue;
            }
            const double q = 4.0 * n * n * sine * sine;
            const double a = 1.0 + sigma0 * k, last = 1.0 - sigma0 * k - 2.0 * sigma1 * k * q;
            const double middle = k * k * (c * c * q + kappa * kappa * q * q) + 2.0 * sigma1 * k * q - 2.0;
            const Complex z = (-middle + std::sqrt(Complex(middle * middle - 4.0 * a * last))) / (2.0 * a);
            poles.push_back({std::abs(std::arg(z)) * sampleRate / (2.0 * pi), -std::log(std::abs(z)) * sampleRate});
        }
        return poles;
    };
    std::optional<Poles> best;
    for (double fewer = 0.0; fewer < 4.0; fewer += 1.0) {
        // Tuned: F0 moved until the first partial that sounds is the wanted one, unless the grid's steps stand against
        // it.
        double f0 = task.partials.harmonicF0();
        auto poles = at(f0, fewer);
        for (int i = 0; i < 30 && poles; ++i) {
            f0 *= task.hz[0] / (*poles)[0].hz;
            poles = at(f0, fewer);
        }
        if (poles && (!best || worstCents(task, *poles, task.near) < worstCents(task, *best, task.near)))
            best = std::move(poles);
    }
    return best;
}

// The table --------------------------------------------------------------------------------------------------------

double median(std::vector<double> values) {
    std::sort(values.begin(), values.end());
    const std::size_t half = values.size() / 2;
    return values.size() % 2 == 1 ? values[half] : 0.5 * (values[half - 1] + values[half]);
}

std::string spread(const std::vector<double>& values, const char* format) {
    char text[64];
    const auto shown = [&](double value) {
        std::snprintf(text, sizeof text, format, value);
        return std::isfinite(value) ? std::string(text) : std::string("none");
    };
    return shown(median(values)) + " … " + shown(*std::max_element(values.begin(), values.end()));
}

Task taskOf(const yardstick::YardstickString& string) {
    Task task{string.partials(), {}, {}};
    for (int n = 1; n <= 120 && task.partials.frequency(n) <= partialsTo; ++n) {
        task.hz.push_back(task.partials.frequency(n));
        task.decay.push_back(task.partials.decayRate(n));
    }
    const auto live = design::makeLoop(task.partials, {sampleRate, design::Quality::live});
    task.near = live ? std::min(task.hz.size(), static_cast<std::size_t>(live->accuracy.coveragePartial)) : 0;
    while (task.decays < task.near && task.hz[task.decays] <= decayTo)
        ++task.decays;
    return task;
}

struct Method {
    const char* name;
    std::function<std::optional<Poles>(const Task&)> run;
};

} // namespace

int main() {
    const Method methods[] = {
        {"this library, live", [](const Task& task) { return ours(task, design::Quality::live); }},
        {"this library, reference", [](const Task& task) { return ours(task, design::Quality::reference); }},
        {"four equal allpasses by closed form, one-pole loss", closedFormCascade},
        {"the best of up to 24 equal allpasses, one-pole loss",
         [](const Task& task) { return searchedCascade(task, 24); }},
        {"explicit finite differences, two losses", finiteDifferences}};
    std::vector<std::string> rows;
    for (const Method& method : methods) {
        std::vector<double> low, near, all, t60, milliseconds;
        std::printf("%s\n", method.name);
        for (const auto& string : yardstick::strings()) {
            if (string.ends.oneFree()) // the finite differences have closed modes between hinges alone
                continue;
            const Task task = taskOf(string);
            std::optional<Poles> poles;
            double best = std::numeric_limits<double>::infinity();
            for (int time = 0; time < 3; ++time) {
                const auto began = std::chrono::steady_clock::now();
                poles = method.run(task);
                const std::chrono::duration<double, std::milli> took = std::chrono::steady_clock::now() - began;
                best = std::min(best, took.count());
            }
            const double off = std::numeric_limits<double>::infinity();
            low.push_back(poles ? worstCents(task, *poles, std::min<std::size_t>(16, task.near)) : off);
            near.push_back(poles ? worstCents(task, *poles, task.near) : off);
            all.push_back(poles ? worstCents(task, *poles, task.hz.size()) : off);
            t60.push_back(poles ? 100.0 * worstT60(task, *poles) : off);
            milliseconds.push_back(best);
            std::printf("  %-16s %7.3f cents to partial 16, %8.3f to %3zu (%5.0f Hz), %9.3f to %3zu (%5.0f Hz); "
                        "T60 %5.2f %%; %8.2f ms\n",
                        string.name, low.back(), near.back(), task.near, task.hz[task.near - 1], all.back(),
                        task.hz.size(), task.hz.back(), t60.back(), milliseconds.back());
        }
        char time[32];
        std::snprintf(time, sizeof time, "%.1f ms", median(milliseconds));
        rows.push_back(std::string("| ") + method.name + " | " + spread(low, "%.2f") + " | " + spread(near, "%.2f") +
                       " | " + spread(all, "%.2f") + " | " + spread(t60, "%.1f") + " | " + time + " |");
    }
    std::printf("\nMedian … worst of the strings:\n\n"
                "| | cents to partial 16 | cents, live's partials | cents, to 10 kHz or partial 120 | "
                "T60 to 6 kHz, %% | design |\n"
                "|---|---|---|---|---|---|\n");
    for (const std::string& row : rows)
        std::printf("%s\n", row.c_str());
}
