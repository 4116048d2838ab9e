// Points on a string against a string cut into finite elements, which shares nothing with the closed forms.
#include "dsp/string/Places.h"
#include "tests/support/BeamElements.h"

#include <Eigen/Eigenvalues>

#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <iostream>
#include <numbers>

using namespace hitchpin;
using string::End;
using string::Side;

namespace {

/// A hundred and twenty elements for ten partials: (kh)⁴/1440 is 5e-6 in frequency, and the end force, a third
/// derivative, is some hundred times coarser.
constexpr int elements = 120, partialCount = 10;
constexpr double allowed = 3e-3;

struct Released {
    std::vector<double> atBridge; ///< force, or velocity of a free end: T = μ = L = 1, so Z0 = 1
    std::vector<double> atPlace;  ///< velocity amplitude at `listen`
};

/// A unit force held and let go at one border, modes of the elements; the bridge is at 1.
Released released(double inharmonicity, string::Ends ends, double pluck, double listen) {
    const auto even = support::bordersForEnds(inharmonicity, elements);
    std::vector<double> borders = even;
    for (const double at : {1.0 - pluck, 1.0 - listen})
        *std::min_element(borders.begin(), borders.end(),
                          [&](double a, double b) { return std::abs(a - at) < std::abs(b - at); }) = at;
    const auto rowAt = [&](double x) {
        return 2 * static_cast<int>(std::find(borders.begin(), borders.end(), x) - borders.begin());
    };
    const auto system = support::beamSystem(inharmonicity, ends, borders);
    const Eigen::GeneralizedSelfAdjointEigenSolver<Eigen::MatrixXd> solver(system.freePart(system.k),
                                                                           system.freePart(system.m));
    Released result;
    const int size = static_cast<int>(system.k.rows()), bridge = size - 2;
    const int first = ends.nut == End::free && ends.bridge == End::free ? 1 : 0;
    for (int i = first; i < first + partialCount; ++i) {
        Eigen::VectorXd mode = Eigen::VectorXd::Zero(size);
        for (std::size_t j = 0; j < system.free.size(); ++j)
            mode[system.free[j]] = solver.eigenvectors()(static_cast<int>(j), i);
        const double squared = solver.eigenvalues()[i], omega = std::sqrt(squared);
        const double moved = mode[rowAt(1.0 - pluck)] / squared;
        const double reaction = (system.k.row(bridge) - squared * system.m.row(bridge)).dot(mode);
        result.atBridge.push_back(std::abs(moved * (ends.bridge == End::free ? omega * mode[bridge] : reaction)));
        result.atPlace.push_back(std::abs(moved * omega * mode[rowAt(1.0 - listen)]));
    }
    return result;
}

double wave(End end, double turns) {
    return std::abs(end == End::free ? std::cos(std::numbers::pi * turns) : std::sin(std::numbers::pi * turns));
}

} // namespace

// Turned red by: n·β for ends that are not hinged, v_g/v_p, a clamped bridge taken for a hinged one.
TEST_CASE("A point force let go rings as the finite elements say, whatever the ends", "[string]") {
    double worstForce = 0.0, worstVelocity = 0.0, worstSides = 0.0;
    for (const End nut : {End::hinged, End::clamped, End::free})
        for (const End bridge : {End::hinged, End::clamped, End::free})
            for (const double inharmonicity : {1e-4, 2e-2})
                for (const double pluck : {0.21}) {
                    const double listen = 0.62;
                    const string::Ends ends{nut, bridge};
                    const auto elementwise = released(inharmonicity, ends, pluck, listen);
                    const string::Partials partials(0.5, inharmonicity, ends, {}, 32);
                    INFO(static_cast<int>(nut) << static_cast<int>(bridge) << ", B " << inharmonicity << ", at " << pluck);
                    for (int n = 1; n <= partialCount; ++n) {
                        const auto i = static_cast<std::size_t>(n - 1);
                        const double force = string::releasedForce(partials, pluck, n);
                        // Against what the partial would have at an antinode: nodes need no division.
                        const double full = 4.0 * string::releaseLevel(partials, n) * partials.slope(n) /
                                            (2.0 * std::numbers::pi * partials.frequency(n));
                        worstForce = std::max(worstForce, std::abs(force - elementwise.atBridge[i]) / full);
                        const double turns = string::turnsOfSide(partials, Side::bridge, listen, n);
                        const double velocity = force * string::velocityLevel(partials, n) * wave(bridge, turns);
                        worstVelocity = std::max(worstVelocity, std::abs(velocity - elementwise.atPlace[i]) / full);
                        // The place is the same from the other side.
                        const double other = string::turnsOfSide(partials, Side::nut, 1.0 - listen, n);
                        worstSides = std::max(worstSides, std::abs(wave(bridge, turns) - wave(nut, other)));
                    }
                }
    std::cout << "let go, nine pairs of ends, B to 0.02: force at the bridge off by " << worstForce
              << " of an antinode's, velocity at 0.62 by " << worstVelocity << " (allowed " << allowed << ")\n";
    CHECK(worstForce <= allowed);
    CHECK(worstVelocity <= allowed);
    CHECK(worstSides <= 1e-9);
}

// The modal sum of a hinged string: 2·sin(nπβ)/(nπ), stiff or not (k_n = (μL/2)·ω_n², end force (nπ/L)·T·(1+Bn²)).
TEST_CASE("Between hinged ends stiffness changes no level", "[string]") {
    for (const double inharmonicity : {0.0, 1e-4, 0.05})
        for (int n = 1; n <= 40; ++n) {
            const string::Partials partials(100.0, inharmonicity, {}, {}, 64);
            CHECK(string::releasedForce(partials, 0.13, n) ==
                  Approx(2.0 * std::abs(std::sin(n * std::numbers::pi * 0.13)) / (n * std::numbers::pi)).margin(1e-12));
            CHECK(string::turnsOfSide(partials, Side::nut, 0.3, n) == Approx(0.3 * n));
            CHECK(string::velocityLevel(partials, n) == Approx(1.0 / std::sqrt(1.0 + inharmonicity * n * n)));
        }
}
