// What a loop has to meet: the string's damped poles, at whole partials and between them.
#pragma once

#include "dsp/design/MakeLoop.h"

#include <complex>
#include <vector>

namespace hitchpin::design {

/// Hz: higher up nobody hears how long a partial rings.
inline constexpr double t60CountsUpTo = 6000.0;

struct LoopTarget {
    double number;          ///< n, also between whole partials
    double turns;           ///< of phase once round: n, or n − ½ where one end is free
    double frequency;       ///< Hz
    double decayRate;       ///< 1/s
    std::complex<double> p; ///< (−σ + j2πf)/fs: the loop's pole is e^p
    std::complex<double> s; ///< tanh(p/2), the bilinear variable there
    double groupDelay;      ///< samples, fs·dn/df
    double loss;            ///< nepers once round, σ·dn/df
    double weight;          ///< how much it counts in a fit
    bool beyond;            ///< higher than the covered partials: for the loss alone, on the unit circle
};

LoopTarget targetAt(const string::Partials&, double sampleRate, double number);

/// Smallest count of sections whose phase can follow the string up to partial n, as a real number:
/// X(n) = n − f/(df/dn), for a hinged string n·Bn²/(1+2Bn²). K sections hold at most 2πK of phase, and the
/// rest has to be a straight line through the origin.
double sectionsNeeded(const string::Partials&, double number);

/// How far and with how many sections a loop is fitted.
struct LoopPlan {
    double needed = 0.0; ///< X at the covered partial
    int sections = 0;
    int coveredPartial = 1; ///< the highest that the fit follows
};
int mostSections(Quality);
LoopPlan planLoop(const string::Partials&, const LoopSettings&);

/// n = 1, 1.5, 2, …, coveredPartial. Fitting whole partials alone lets narrow allpass poles hide between
/// them.
std::vector<LoopTarget> phaseTargets(const string::Partials&, double sampleRate, int coveredPartial);

/// The partials (thinned out where there are many) for the loss, and some beyond the covered ones, where the
/// loop's delay no longer follows the string: there its delay at the last covered one counts.
std::vector<LoopTarget> lossTargets(const string::Partials&, double sampleRate, int coveredPartial);

} // namespace hitchpin::design
