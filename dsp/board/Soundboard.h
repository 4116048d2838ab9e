// What the strings drive: soundboards and the bridges on them, as the mobility (velocity over force) that a string meets.
#pragma once

#include <complex>
#include <string>
#include <vector>

namespace hitchpin::board {

/// One resonance of the board as tap tones show it: a mass on a spring, found at the bridges.
struct Mode {
    double frequency = 0.0;    ///< Hz, undamped
    double q = 0.0;
    double mass = 0.0;         ///< kg, effective where its shape is 1
    double angle = 0.0;        ///< rad from across towards into: the direction in which it moves the bridge
    std::vector<double> shape; ///< its motion at each of the board's points
    double pan = 0.0;          ///< −1…1
};

/// Whether any of them moves a bridge across: one whose angle is all but a right one does not.
bool movesAcross(const std::vector<Mode>&) noexcept;

enum class BridgeKind { rigid, resistance, soundboard };

/// Where a bridge may push the board.
struct Point {
    double resistance = 0.0; ///< kg/s, into the board: what is left of the plate besides the modes
    double along = 0.5;      ///< 0…1 along its bridge
};

/// Points that move for themselves, with the modes behind them. All bridges on one board move each other through it.
struct Board {
    BridgeKind kind = BridgeKind::rigid;
    std::vector<Point> points; ///< none where rigid
    std::vector<Mode> modes;
};

/// A line over some of a board's points, spread evenly from its one end to the other.
struct Bridge {
    std::string name;
    int board = 0;      ///< index among the instrument's
    int firstPoint = 0; ///< of the board
    int points = 1;
};

/// Gives a board the points of one more bridge, all of that resistance.
Bridge addBridge(std::string name, int boardIndex, Board&, int points, double resistance);

/// A string between two points moves with their weighted mean and pulls at both with the same weights, so that what
/// leaves the string arrives at the board.
struct Sharing {
    int first = 0;            ///< the board's point below it
    double ofFirst = 1.0;     ///< weights, together 1
    double ofSecond = 0.0;    ///< of point first + 1
    bool operator==(const Sharing&) const = default;
};
/// At a position 0…1 along the bridge.
Sharing sharing(const Bridge&, double position) noexcept;
/// The mode's shape where the string stands.
double shapeAt(const Mode&, const Sharing&) noexcept;

/// v = Y·F at one place, in and between the two directions; reciprocal, so three numbers say it. s/kg.
struct Mobility {
    std::complex<double> across, coupled, into;
};

/// Resting strings on a board, as the engine has them: each takes what comes like an endless string, Z0 at its place
/// in both directions.
struct Resting {
    Sharing place;
    double impedance; ///< kg/s
};

/// Mobility at a place of a board at the complex frequency s (1/s; jω on the axis):
/// Y = Σ φ²·(s/m)/(s² + sω/Q + ω²)·[direction] + 1/R into, loaded by the resting strings: (1 + Y·Z)⁻¹·Y.
/// Sources: modal mobility, Fletcher and Rossing, The Physics of Musical Instruments, ch. 1 (from memory).
class MobilityAt {
public:
    MobilityAt(const Board&, const Sharing& place, const std::vector<Resting>& others = {});
    Mobility operator()(std::complex<double> s) const;

private:
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
