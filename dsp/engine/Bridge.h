// Where strings meet their board, over one bridge or several: modes, and a resistance at each point, exact at every
// sample.
#pragma once

#include "dsp/board/Soundboard.h"
#include "dsp/design/InstrumentDesign.h"
#include "dsp/design/ModeFilter.h"
#include "dsp/engine/Chain.h"

#include <vector>

namespace hitchpin::engine {

enum Direction { across, into };

/// Constructing allocates; the rest is real-time safe. The bridges of a board are one junction, with a component for
/// each of their points in each direction in which something lets it move; its velocity v and the strings' pull F obey
/// v = Y0·F + h, with h from the modes' states, and F = S − Z·v, with Z the strings' impedances and S = 2ΣZ·in: so (1 +
/// Y0·Z)·v = Y0·S + h. Passive: what the strings lose, Σ Z(in² − out²), is Fv and goes into modes and resistance
/// (ModeFilter.h).
class Bridge {
public:
    Bridge(const design::BoardDesign&, double sampleRate);

    bool rigid() const noexcept { return size_ == 0; }
    /// Heard by the board's motion rather than by the strings' forces.
    bool heardByBoard() const noexcept { return heardPerVelocity_ > 0.0; }
    /// First component of a direction, −1 where the bridge does not move that way.
    int firstComponent(Direction direction) const noexcept { return first_[direction]; }

    void clear() noexcept;
    /// Goes on moving as `before` does, where both have the same number of modes; else it starts at rest.
    void takeOver(const Bridge& before) noexcept;
    /// The modes die away within so many samples.
    void fade(int samples) noexcept;
    bool ringing() const noexcept { return ringing_; }
    double energy() const noexcept; ///< J
    /// Modes that have decayed beyond meaning come to rest.
    void rest(double leastEnergy) noexcept;
    void flush() noexcept;

    /// The strings that hold the bridge, told before each run: between the two calls each string with its place.
    void startLoad() noexcept;
    void addLoad(Direction, const board::Sharing&, double impedance) noexcept;
    /// Solves anew where the load has changed.
    void endLoad() noexcept;

    /// A string's pull as if the bridge stood still, 2Z·in, added for `count` samples; and the velocity of its end.
    void clearDrive(int count) noexcept;
    void addDrive(Direction, const board::Sharing&, double twiceImpedance, const double* in, int count) noexcept;
    void run(int count) noexcept;
    void velocity(Direction, const board::Sharing&, double* out, int count) const noexcept;
    /// Largest speed of any component since it was last forgotten.
    double peak() const noexcept { return peak_; }
    void forgetPeak() noexcept { peak_ = 0.0; }

    /// What is heard of a soundboard: its modes and, point by point, its remainder, each with a direction and a place.
    int sources() const noexcept { return static_cast<int>(sources_.size()); }
    struct Source {
        double angle; ///< rad from across towards into
        double place; ///< 0…1 from left to right
    };
    const Source& source(int i) const noexcept { return sources_[static_cast<std::size_t>(i)]; }
    /// Of the last run, in newtons (BoardDesign::heard).
    const double* heard(int source) const noexcept {
        return &heard_[static_cast<std::size_t>(source) * longestChunk];
    }

private:
    struct ModeState {
        design::ModeFilter filter;
        double u = 0.0, e = 0.0;
        double own = 0.0; ///< what ū would be without a force, of the sample that is run
    };
    double* row(std::vector<double>& rows, std::size_t i) noexcept { return &rows[i * longestChunk]; }

    int points_ = 0;
    std::size_t size_ = 0; ///< components
    int first_[2] = {-1, -1};
    double heardPerVelocity_ = 0.0;
    std::vector<ModeState> modes_;
    std::vector<double> motion_;   ///< modes × components
    std::vector<double> atOnce_;   ///< Y0, components²
    std::vector<double> load_, newLoad_;
    std::vector<double> byPull_;   ///< (1 + Y0·Z)⁻¹·Y0
    std::vector<double> byState_;  ///< (1 + Y0·Z)⁻¹
    std::vector<double> work_;     ///< components²
    std::vector<double> drive_, velocity_, heard_; ///< rows of longestChunk
    std::vector<double> sample_;   ///< 3 × components: S, h, v of one sample
    std::vector<Source> sources_;
    std::vector<double> resistance_; ///< kg/s, by point
    double peak_ = 0.0;
    bool ringing_ = false;
    int fadeLeft_ = 0;
    double fadeStep_ = 1.0;
};

} // namespace hitchpin::engine
