// What a place on a string means to each partial: where along its wave the place lies, and how strongly the partial
// answers to it.
#pragma once

#include "dsp/string/Partials.h"

namespace hitchpin::string {

/// A place splits the speaking length into two sides, each with an end.
enum class Side { bridge, nut };

inline End endOf(const Ends& ends, Side side) noexcept { return side == Side::bridge ? ends.bridge : ends.nut; }
/// What a wave of velocity is multiplied by where it turns at that end.
inline double turnAt(End end) noexcept { return end == End::free ? 1.0 : -1.0; }

/// Turns of phase of partial n (also between whole ones) from the place to the end of that side and back, without
/// what the end itself turns over; `share` is the side's share of the speaking length. For hinged ends n·share. In
/// general ν·share + θ, ν = kL/π with k the partial's wave number, and θ the near field of the end: clamped
/// −arctan(k/κ)/π, free +arctan((k/κ)³)/π, κ² = k² + T/EI. (Stiff string under tension, the roots of its
/// characteristic equation ±jk and ±κ; the wave at an end from the two conditions there.) What then lacks to whole
/// partials (bare ends of a winding) is shared by both ends. Leaves out the near field itself at the place, e^(−κx).
double turnsOfSide(const Partials&, Side, double share, double n);

/// A static point force on the string, let go, rings in partial n of the bridge force with (amplitude at the release,
/// N per N) 4·G·|sin(πt)|/(ω·τ_g), cos for a free bridge, with t = turnsOfSide, τ_g = dn/df and
///     G = v_p/v_g = (1+x)/(1+2x)   hinged bridge,     √((1+x)/(1+2x))   clamped,     x = Bν²
///     G = cos ψ/√(1+x), tan ψ = (x/(1+x))^(3/2)       free bridge: Z0 times its velocity
/// so that for hinged ends it is 2·sin(nπβ)/(nπ) whatever the stiffness: modal stiffness (μL/2)·ω_n² and modal end
/// force (nπ/L)·T·(1+Bn²), whose stiffness cancels. Elsewhere the mode's mass is (μ/4)·v_g·τ_g, the energy of the
/// standing wave, and its end force −EI·u''' (clamped). Checked against finite elements in the tests.
double releaseLevel(const Partials&, double n); ///< G, 0…1
double releasedForce(const Partials&, double ratioFromBridge, double n);

/// Z0 times the velocity amplitude of partial n at its antinodes, over its amplitude of bridge force (of a free
/// bridge: of what is heard there). Hinged: 1/√(1+x).
double velocityLevel(const Partials&, double n);

} // namespace hitchpin::string
