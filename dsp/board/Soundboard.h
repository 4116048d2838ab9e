// What the strings drive: bridges on a soundboard, as the mobility (velocity over force) that a string meets.
#pragma once

#include <complex>
#include <string>
#include <vector>

namespace hitchpin::board {

/// One resonance of the board as tap tones show it: a mass on a spring, found at the bridge.
struct Mode {
    double frequency = 0.0;    ///< Hz, undamped
    double q = 0.0;
    double mass = 0.0;         ///< kg, effective where its shape is 1
    double angle = 0.0;        ///< rad from across towards into: the direction in which it moves the bridge
    std::vector<double> shape; ///< its motion at each of the bridge's points
    double pan = 0.0;          ///< −1…1
};

enum class BridgeKind { rigid, resistance, soundboard };

/// A line with one or more points that move for themselves, spread evenly from 0 to 1. Behind them the modes, and at
/// each point, into the board, what is left of the plate: a resistance.
struct Bridge {
    std::string name;
    BridgeKind kind = BridgeKind::rigid;
    int points = 1;
    double resistance = 0.0; ///< kg/s
    std::vector<Mode> modes;
};

/// A string between two points moves with their weighted mean and pulls at both with the same weights, so that what
/// leaves the string arrives at the board.
struct Sharing {
    int first = 0;            ///< the point below it
    double ofFirst = 1.0;     ///< weights, together 1
    double ofSecond = 0.0;    ///< of point first + 1
};
Sharing sharing(double position, int points) noexcept;
/// The mode's shape where the string stands.
double shapeAt(const Mode&, const Sharing&) noexcept;

/// v = Y·F at one place, in and between the two directions; reciprocal, so three numbers say it. s/kg.
struct Mobility {
    std::complex<double> across, coupled, into;
};

/// Resting strings on a bridge, as the engine has them: each takes what comes like an endless string, Z0 at its place
/// in both directions.
struct Resting {
    double position;
    double impedance; ///< kg/s
};

/// Mobility at a place of a bridge at the complex frequency s (1/s; jω on the axis):
/// Y = Σ φ²·(s/m)/(s² + sω/Q + ω²)·[direction] + 1/R into, loaded by the resting strings: (1 + Y·Z)⁻¹·Y.
/// Sources: modal mobility, Fletcher and Rossing, The Physics of Musical Instruments, ch. 1 (from memory).
class MobilityAt {
public:
    MobilityAt(const Bridge&, double position, const std::vector<Resting>& others = {});
    Mobility operator()(std::complex<double> s) const;

private:
    template <class Matrix>
    Mobility loaded(std::complex<double> s) const;

    struct Part {
        double frequency, q, mass; // of a mode, rad/s
        std::vector<double> motion; // at each component: all points across, then all into
    };
    std::vector<Part> parts_;
    std::vector<double> remainder_; ///< 1/R by component
    std::vector<double> load_;      ///< components², kg/s
    std::vector<double> here_;      ///< the place's weights over points
    bool loaded_ = false;
};

} // namespace hitchpin::board
