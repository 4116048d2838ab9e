// The instrument file, version 1, in the workshop's units: what was written, nothing worked out yet.
// What each key means, its unit, range and default stand in the field table (Fields.cpp), from which
// reading, messages, writing and the printed reference derive.
#pragma once

#include <array>
#include <cstdint>
#include <optional>
#include <string>
#include <utility>
#include <vector>

namespace hitchpin::document {

/// Which of a record's keys stood in the file, a bit for each in the order of its field table. Such keys are
/// written back even at their default. It is how a thing was written, not what it says: all are equal.
struct Given {
    std::uint64_t keys = 0;
    bool has(std::size_t key) const noexcept { return (keys >> key & 1u) != 0; }
    void add(std::size_t key) noexcept { keys |= std::uint64_t{1} << key; }
    bool operator==(const Given&) const noexcept { return true; }
};

enum class Stretch { none, octaves2to1, octaves4to2 };
enum class Tuned { alone, onTheBoard };
enum class CoreShape { round, hex };
enum class Measured { slack, atPitch };
enum class WindingShape { round, flat };
enum class End { hinged, clamped, free };
enum class BridgeKind { rigid, resistance, soundboard };
enum class With { finger, plectrum, felt, tangent, bow };
enum class Notes { asBuilt, everyKeyStrung };

struct Tuning {
    double a4Hz = 440.0;
    std::string temperament = "equal";
    std::string root = "C";
    std::array<double, 12> offsetsCents{};
    Stretch stretch = Stretch::none;
    Tuned tuned = Tuned::onTheBoard;
    Given given;
    bool operator==(const Tuning&) const = default;
};

struct Climate {
    double temperatureC = 20.0;
    double frameExpansionPerK = 0.0;
    Given given;
    bool operator==(const Climate&) const = default;
};

/// A material of the file's own.
struct Material {
    double densityKgM3 = 0.0;
    double youngsModulusGpa = 0.0;
    std::optional<double> slowModulusGpa; ///< as youngsModulusGpa
    double tensileStrengthMpa = 0.0;
    std::vector<std::array<double, 2>> strengthByDiameter; ///< mm, MPa
    double workingShare = 0.6;
    double fill = 1.0;
    double bendingLoss = 0.003;
    double constantLoss = 0.00015;
    double expansionPerK = 0.0;
    std::string remarks;
    Given given;
    bool operator==(const Material&) const = default;
};

struct Core {
    std::string material;
    double diameterMm = 0.0;
    CoreShape shape = CoreShape::round;
    Measured measured = Measured::slack;
    Given given;
    bool operator==(const Core&) const = default;
};

struct Winding {
    std::string material;
    WindingShape shape = WindingShape::round;
    std::optional<double> diameterMm;
    std::optional<double> thicknessMm;
    std::optional<double> widthMm;
    std::array<double, 2> bareMm{}; ///< at the nut, at the bridge
    double loss = 0.0;
    Given given;
    bool operator==(const Winding&) const = default;
};

struct Ends {
    End nut = End::hinged;
    End bridge = End::hinged;
    Given given;
    bool operator==(const Ends&) const = default;
};

/// The lengths of string that do not speak, between nut and tuning pin and between bridge and hitch pin.
struct Beyond {
    double nut = 0.0;    ///< mm
    double bridge = 0.0; ///< mm
    bool rings = false;
    Given given;
    bool operator==(const Beyond&) const = default;
};

/// Where the string's ends lie on the drawing, x and y.
struct Plan {
    std::array<double, 2> nutMm{};
    std::array<double, 2> bridgeMm{};
    Given given;
    bool operator==(const Plan&) const = default;
};

struct BoardMode {
    double frequencyHz = 0.0;
    double q = 0.0;
    double massKg = 0.0;
    double angleDeg = 90.0; ///< from across towards into
    std::vector<double> shape; ///< a value for each point of the board; empty: 1 at each
    double pan = 0.0;
    Given given;
    bool operator==(const BoardMode&) const = default;
};

struct Bridge {
    std::string name = "main";
    BridgeKind kind = BridgeKind::rigid;
    std::string board;        ///< the bridge whose soundboard this one stands on; empty: it has its own
    int points = 1;
    double resistanceKgS = 1000.0;
    std::vector<BoardMode> modes;
    Given given;
    bool operator==(const Bridge&) const = default;
};

/// Strings that sound one note together. In `each` the same keys say what differs for one of them.
struct Course {
    std::optional<std::string> note;
    std::optional<double> pitchHz;
    std::optional<double> tensionN;
    double cents = 0.0;
    int strings = 1;
    std::vector<double> detuneCents; ///< a value for each string; empty: none
    double speakingLengthMm = 0.0;
    Core core;
    std::vector<Winding> windings;
    std::optional<double> linearDensityGM;
    std::optional<double> bendingStiffnessNM2;
    Ends ends;
    std::vector<Course> each; ///< one a string, or none
    std::string bridge;       ///< empty: the first
    std::optional<double> bridgePosition; ///< none: spread evenly in the file's order
    std::optional<double> pluckRatio;
    std::optional<double> pluckPointMm;
    std::optional<double> strikeRatio;
    bool damper = false;
    int frets = 0;
    Beyond beyondMm;
    Plan plan;
    std::string remarks;
    Given given;
    bool operator==(const Course&) const;
};

struct Hammer {
    std::string note;
    double massG = 0.0;
    double stiffness = 0.0; ///< K in F = K·x^p, N/m^p
    double exponent = 2.5;
    Given given;
    bool operator==(const Hammer&) const = default;
};

struct TangentMeasures {
    double liftMm = 3.0;
    double speedMS = 0.5;
    Given given;
    bool operator==(const TangentMeasures&) const = default;
};

struct BowMeasures {
    double pointRatio = 0.1;
    double forceN = 1.0;
    double speedMS = 0.2;
    double staticFriction = 0.8;
    double slidingFriction = 0.3;
    Given given;
    bool operator==(const BowMeasures&) const = default;
};

struct Playing {
    With with = With::finger;
    double widthMm = 3.0;
    double forceN = 2.0;
    std::optional<double> heightMm; ///< instead of the force
    double angleDeg = 45.0;
    double softnessMmN = 0.0;
    Notes notes = Notes::asBuilt;
    std::vector<std::array<double, 2>> velocity; ///< MIDI velocity, the measure that drives the string
    double bendSemitones = 2.0;
    bool channelPerCourse = false;
    std::vector<Hammer> hammers;
    TangentMeasures tangent;
    BowMeasures bow;
    Given given;
    bool operator==(const Playing&) const = default;
};

/// Names in the file's order.
template <class T>
using Named = std::vector<std::pair<std::string, T>>;

struct Instrument {
    std::string name;
    std::string remarks;
    Tuning tuning;
    Climate climate;
    Named<Material> materials;
    Named<std::vector<double>> gauges; ///< mm that the shop stocks, by material
    std::vector<Bridge> bridges;       ///< none: one rigid bridge named "main"
    std::vector<Course> courses;
    Playing playing;
    Given given;
    bool operator==(const Instrument&) const = default;
};

} // namespace hitchpin::document
