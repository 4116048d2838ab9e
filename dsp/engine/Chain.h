// Filters one after another, in the forms that keep their energy.
#pragma once

#include "dsp/design/LoopDesign.h"
#include "dsp/design/Sections.h"

#include <vector>

namespace hitchpin::engine {

/// Nothing in the engine is ever run in longer chunks, in samples.
inline constexpr int longestChunk = 64;

/// factor · ∏shelves · ∏sections · thiran, in the forms of dsp/design/Sections.h. The energy of every one is the sum of its
/// states' squares: ladders and Thiran's section keep it, shelves never make any.
struct Chain {
    /// A `thiran` of 1 passes unchanged.
    Chain(double factor, double thiran, const std::vector<design::LossShelf>&,
          const std::vector<design::AllpassSection>&);

    double factor;
    double thiranSin; ///< the fractional delay as a plane rotation
    double thiranCos;
    std::vector<design::ShelfForm> shelves;
    std::vector<design::SteepShelfForm> steepShelves;
    std::vector<design::LadderForm> sections;
};

/// What is under way in a chain. Only `makeRoomFor` allocates.
class ChainState {
public:
    void makeRoomFor(const Chain&);
    void run(const Chain&, double* wave, int count) noexcept;
    void clear() noexcept;
    double sumOfSquares() const noexcept;
    /// States that have decayed beyond meaning become nought before they reach the slow, denormal numbers.
    void flush() noexcept;

private:
    struct TwoStates {
        double m1 = 0.0, m2 = 0.0;
    };
    std::vector<double> shelves_;
    std::vector<TwoStates> steepShelves_;
    std::vector<TwoStates> sections_;
    double thiran_ = 0.0;
};

} // namespace hitchpin::engine
