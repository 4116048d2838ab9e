#include "dsp/board/Soundboard.h"

#include "dsp/base/Elimination.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace hitchpin::board {

namespace {

using Complex = std::complex<double>;

void addWeights(std::vector<double>& weights, const Sharing& place) {
    const auto first = static_cast<std::size_t>(place.first);
    weights[first] += place.ofFirst;
    if (place.ofSecond != 0.0)
        weights[first + 1] += place.ofSecond;
}

} // namespace

bool movesAcross(const std::vector<Mode>& modes) noexcept {
    constexpr double leastPart = 1e-9;
    return std::any_of(modes.begin(), modes.end(),
                       [](const Mode& mode) { return std::abs(std::cos(mode.angle)) > leastPart; });
}

Bridge addBridge(std::string name, int boardIndex, Board& board, int points, double resistance) {
    Bridge bridge{std::move(name), boardIndex, static_cast<int>(board.points.size()), points};
    for (int p = 0; p < points; ++p)
        board.points.push_back({resistance, points > 1 ? static_cast<double>(p) / (points - 1) : 0.5});
    return bridge;
}

Sharing sharing(const Bridge& bridge, double position) noexcept {
    if (bridge.points <= 1)
        return {bridge.firstPoint};
    const double along = std::clamp(position, 0.0, 1.0) * (bridge.points - 1);
    const int below = std::min(static_cast<int>(along), bridge.points - 2);
    return {bridge.firstPoint + below, 1.0 - (along - below), along - below};
}

double shapeAt(const Mode& mode, const Sharing& place) noexcept {
    const auto first = static_cast<std::size_t>(place.first);
    const double second = place.ofSecond != 0.0 ? place.ofSecond * mode.shape[first + 1] : 0.0;
    return place.ofFirst * mode.shape[first] + second;
}

MobilityAt::MobilityAt(const Board& board, const Sharing& place, const std::vector<Resting>& others) {
    // A rigid one has nothing that moves.
    if (board.kind == BridgeKind::rigid)
        return;
    const auto points = board.points.size();
    here_.assign(points, 0.0);
    addWeights(here_, place);
    remainder_.assign(2 * points, 0.0);
    for (std::size_t p = 0; p < points; ++p)
        remainder_[points + p] = 1.0 / board.points[p].resistance;
    for (const Mode& mode : board.modes) {
        Part part{2.0 * std::numbers::pi * mode.frequency, mode.q, mode.mass, std::vector<double>(2 * points)};
        for (std::size_t p = 0; p < points; ++p) {
            part.motion[p] = mode.shape[p] * std::cos(mode.angle);
            part.motion[points + p] = mode.shape[p] * std::sin(mode.angle);
        }
        parts_.push_back(std::move(part));
    }
    load_.assign(4 * points * points, 0.0);
    for (const Resting& other : others) {
        std::vector<double> weights(points, 0.0);
        addWeights(weights, other.place);
        for (std::size_t p = 0; p < points; ++p)
            for (std::size_t q = 0; q < points; ++q)
                for (const std::size_t direction : {std::size_t{0}, points})
                    load_[(direction + p) * 2 * points + direction + q] += weights[p] * weights[q] * other.impedance;
        loaded_ = true;
    }
}

Mobility MobilityAt::operator()(Complex s) const {
    const std::size_t size = remainder_.size(), points = here_.size();
    if (points == 0)
        return {};
    std::vector<Complex> mobility(size * size);
    for (std::size_t i = 0; i < size; ++i)
        mobility[i * size + i] = remainder_[i];
    for (const Part& part : parts_) {
        const double w = part.frequency;
        const Complex y = s / (part.mass * (s * s + s * (w / part.q) + w * w));
        for (std::size_t i = 0; i < size; ++i)
            for (std::size_t j = 0; j < size; ++j)
                mobility[i * size + j] += y * (part.motion[i] * part.motion[j]);
    }
    if (loaded_) {
        std::vector<Complex> inside(size * size);
        for (std::size_t i = 0; i < size; ++i)
            for (std::size_t j = 0; j < size; ++j) {
                Complex sum = i == j ? 1.0 : 0.0;
                for (std::size_t k = 0; k < size; ++k)
                    sum += mobility[i * size + k] * load_[k * size + j];
                inside[i * size + j] = sum;
            }
        eliminate(inside.data(), mobility.data(), size, size);
    }
    const auto between = [&](std::size_t row, std::size_t column) {
        Complex sum = 0.0;
        for (std::size_t i = 0; i < points; ++i)
            for (std::size_t j = 0; j < points; ++j)
                sum += here_[i] * here_[j] * mobility[(row + i) * size + column + j];
        return sum;
    };
    return {between(0, 0), between(0, points), between(points, points)};
}

} // namespace hitchpin::board
