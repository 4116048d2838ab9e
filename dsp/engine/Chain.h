// Filters one after another, in the forms that keep their energy.
#pragma once

#include "dsp/design/LoopDesign.h"
#include "dsp/design/Sections.h"

#include <vector>

namespace hitchpin::engine {

/// Nothing in the engine is ever run in longer chunks, in samples.
inline constexpr int longestChunk = 64;

/// factor · ∏shelves · ∏sections · thiran. Every form stores a known energy and none makes any:
/// the ladders keep the sum of squares exactly; a shelf y = b0·x + c·m, m' = x − a1·m, c = b1 − a1·b0, obeys
/// y² + |c|·m'² ≤ x² + |c|·m² whenever |H| ≤ 1 on the circle. (Bounded-real lemma for one state: a weight p serves
/// if p² − [(1−b0²)(1−a1²) + c² + 2·a1·b0·c]·p + c² ≤ 0; the two bounds of p have the product c², so p = |c|
/// lies between them whenever any p does.)
struct Chain {
    struct Shelf {
        double b0, a1, c;
    };

    /// A `thiran` of 1 passes unchanged.
    Chain(double factor, double thiran, const std::vector<design::LossShelf>&,
          const std::vector<design::AllpassSection>&);

    double factor;
    double thiranSin; ///< the fractional delay as a plane rotation
    double thiranCos;
    std::vector<Shelf> shelves;
    std::vector<design::LadderForm> sections;
};

/// What is under way in a chain. Only `makeRoomFor` allocates.
class ChainState {
public:
    void makeRoomFor(const Chain&);
    void run(const Chain&, double* wave, int count) noexcept;
    void clear() noexcept;
    /// Σ of squares of the states, weighted as above.
    double sumOfSquares(const Chain&) const noexcept;
    /// States that have decayed beyond meaning become nought before they reach the slow, denormal numbers.
    void flush() noexcept;

private:
    struct LadderState {
        double m1 = 0.0, m2 = 0.0;
    };
    std::vector<LadderState> sections_;
    std::vector<double> shelves_;
    double thiran_ = 0.0;
};

} // namespace hitchpin::engine
