// Where a string's partials lie and how long each rings, as functions of a real partial number.
#pragma once

#include <vector>

namespace hitchpin::string {

/// The condition at an end of the speaking length.
enum class End { hinged, clamped, free };

struct Ends {
    End nut = End::hinged;
    End bridge = End::hinged;
    /// One free end: partials lie near odd multiples, and a loop round the string inverts.
    bool oneFree() const noexcept { return (nut == End::free) != (bridge == End::free); }
};

/// The string's own losses (without the bridge).
struct Losses {
    double bendingLoss = 0.0;    ///< δ
    double constantLoss = 0.0;   ///< added to 1/Q, winding included
    double outerRadius = 0.0;    ///< m, for the air
    double linearDensity = 0.0;  ///< kg/m, for the air
};

/// Partials of one string at one tension. Partial n = 1 is the lowest that sounds. Between whole numbers the
/// functions are smooth, so that a filter fit may ask for n = 1.5. Cheap to copy; every call is pure.
class Partials {
public:
    Partials() = default;

    /// @param harmonicF0 √(T/μ)/2L, Hz  @param inharmonicity B = π²·EI/(T·L²)
    /// @param count highest partial that is asked for exactly; beyond it the trend is followed
    Partials(double harmonicF0, double inharmonicity, Ends ends, Losses losses, int count);

    /// For strings whose partials come from elsewhere (bare ends of a winding): measured or computed
    /// frequencies f_1…f_count, Hz. `inharmonicity` is the effective one, for the loss law.
    Partials(std::vector<double> frequencies, double harmonicF0, double inharmonicity, Ends ends, Losses losses);

    double frequency(double n) const;  ///< Hz
    double slope(double n) const;      ///< df/dn, Hz
    double decayRate(double n) const;  ///< σ = 1/τ of the amplitude, 1/s
    double inverseQ(double n) const;   ///< 1/Q = σ/(πf)
    double t60(double n) const;        ///< s, ln(1000)/σ

    double harmonicF0() const noexcept { return harmonicF0_; }
    double inharmonicity() const noexcept { return inharmonicity_; }
    Ends ends() const noexcept { return ends_; }

private:
    struct RatioAt {
        double value, derivative;
    };
    void setTable(std::vector<double> overF0);
    RatioAt ratioAt(double n) const;

    double harmonicF0_ = 0.0;
    double inharmonicity_ = 0.0;
    Ends ends_;
    Losses losses_;
    std::vector<double> ratio_;      ///< f_n over the hinged law at n, n = 1…count; empty where that law is exact
    std::vector<double> ratioSlope_; ///< its derivative by n at the same places
};

} // namespace hitchpin::string
