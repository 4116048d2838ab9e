#include "dsp/design/InstrumentDesign.h"

#include "dsp/design/MakePlace.h"
#include "dsp/design/ModeFilter.h"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <numbers>

namespace hitchpin::design {

namespace {

std::string nameOf(const CourseDescription& course, std::size_t index) {
    return "courses[" + std::to_string(index) + "]" + (course.name.empty() ? "" : " (" + course.name + ")");
}

std::string placeOf(std::size_t string, std::size_t stringCount, int stop) {
    std::string place;
    if (stringCount > 1)
        place += ", string " + std::to_string(string + 1);
    if (stop > 0)
        place += ", fret " + std::to_string(stop);
    return place;
}

SpeakingString speaking(const string::Strung& strung, LoopDesign loop, const CourseDescription& course,
                        const SpeakingString* neighbour) {
    const double length = strung.description.speakingLength;
    SpeakingString string{std::move(loop), length, strung.statics.tension, 2.0 * length * strung.partials.harmonicF0(),
                          {}, {}};
    string.plucked = makePlace(strung.partials, string.loop, PlaceUse::plucked, course.pluckRatio,
                               neighbour != nullptr ? &neighbour->plucked : nullptr);
    if (course.listeningRatio > 0.0)
        string.listening = makePlace(strung.partials, string.loop, PlaceUse::heard, course.listeningRatio,
                                     neighbour != nullptr ? &*neighbour->listening : nullptr);
    return string;
}

/// What the engine takes for granted.
std::string problemWith(const InstrumentDescription& description) {
    if (description.courses.empty())
        return "the instrument has no courses";
    for (std::size_t i = 0; i < description.boards.size(); ++i) {
        const board::Board& board = description.boards[i];
        if (board.kind != board::BridgeKind::rigid && board.points.empty())
            return "boards[" + std::to_string(i) + "]: has no points";
        for (const board::Point& point : board.points)
            if (!(point.resistance > 0.0 && std::isfinite(point.resistance)))
                return "boards[" + std::to_string(i) + "]: its resistance must be over 0 kg/s at each point";
        for (const board::Mode& mode : board.modes)
            if (!(mode.frequency > 0.0 && mode.q > 0.0 && mode.mass > 0.0) || mode.shape.size() != board.points.size())
                return "boards[" + std::to_string(i) +
                       "]: a mode needs a frequency, a Q and a mass over 0 and its shape at each point";
    }
    for (std::size_t i = 0; i < description.bridges.size(); ++i) {
        const board::Bridge& bridge = description.bridges[i];
        if (bridge.board < 0 || bridge.board >= static_cast<int>(description.boards.size()))
            return "bridges[" + std::to_string(i) + "]: stands on a board that the instrument does not have";
        const board::Board& board = description.boards[static_cast<std::size_t>(bridge.board)];
        if (board.kind != board::BridgeKind::rigid &&
            (bridge.points < 1 || bridge.firstPoint < 0 ||
             bridge.firstPoint > static_cast<int>(board.points.size()) - bridge.points))
            return "bridges[" + std::to_string(i) + "]: stands on points that its board does not have";
    }
    for (std::size_t i = 0; i < description.courses.size(); ++i) {
        const CourseDescription& course = description.courses[i];
        if (course.strings.empty())
            return nameOf(course, i) + ": has no strings";
        if (course.bridge < 0 || course.bridge >= static_cast<int>(description.bridges.size()))
            return nameOf(course, i) + ": stands on a bridge that the instrument does not have";
        if (course.frets < 0)
            return nameOf(course, i) + ": the number of frets is negative";
    }
    return {};
}

/// Root mean square of the mobility into the board at its points, without strings, over a logarithmic scale of what is
/// heard best.
double meanMobility(const board::Board& board) {
    constexpr double lowest = 80.0, highest = 5000.0; // Hz
    constexpr int steps = 400;
    double sum = 0.0;
    for (std::size_t p = 0; p < board.points.size(); ++p) {
        // Without strings the other points do not matter.
        board::Board point{board.kind, {board.points[p]}, board.modes};
        for (board::Mode& mode : point.modes)
            mode.shape = {mode.shape[p]};
        const board::MobilityAt mobility(point, {});
        for (int i = 0; i < steps; ++i) {
            const double hz = lowest * std::pow(highest / lowest, (i + 0.5) / steps);
            sum += std::norm(mobility({0.0, 2.0 * std::numbers::pi * hz}).into);
        }
    }
    return std::sqrt(sum / (steps * static_cast<double>(board.points.size())));
}

} // namespace

BoardDesign boardDesign(const board::Board& from, double sampleRate) {
    BoardDesign board;
    board.kind = from.kind;
    if (from.kind == board::BridgeKind::rigid)
        return board;
    board.points = from.points;
    if (from.kind == board::BridgeKind::soundboard) {
        for (const board::Mode& mode : from.modes)
            if (mode.frequency <= highestModeShareOfRate * sampleRate)
                board.modes.push_back(mode);
        board.heard = 1.0 / meanMobility(from);
    }
    return board;
}

Result<std::shared_ptr<const InstrumentDesign>> makeInstrument(const InstrumentDescription& description,
                                                               const LoopSettings& settings,
                                                               const Progress& progress) {
    if (std::string problem = problemWith(description); !problem.empty())
        return Failure{std::move(problem)};

    auto design = std::make_shared<InstrumentDesign>();
    design->sampleRate = settings.sampleRate;
    for (const board::Board& board : description.boards)
        design->boards.push_back(boardDesign(board, settings.sampleRate));

    std::size_t loops = 0, loopsDone = 0;
    for (const CourseDescription& course : description.courses)
        loops += course.strings.size() * static_cast<std::size_t>(course.frets + 1);

    for (std::size_t c = 0; c < description.courses.size(); ++c) {
        const CourseDescription& course = description.courses[c];
        design->courses.push_back({course.key, static_cast<int>(design->strings.size()),
                                   static_cast<int>(course.strings.size()), course.pluckRatio,
                                   course.hasDamper, course.frets});
        for (std::size_t s = 0; s < course.strings.size(); ++s) {
            const string::Strung& open = course.strings[s];
            StringDesign string;
            string.course = static_cast<int>(c);
            const board::Bridge& bridge = description.bridges[static_cast<std::size_t>(course.bridge)];
            string.board = bridge.board;
            string.place = board::sharing(bridge, course.bridgePosition);
            string.bridgePosition = course.bridgePosition;
            string.impedance = open.statics.impedance;
            string.ends = open.description.ends;
            for (int stop = 0; stop <= course.frets; ++stop) {
                if (progress && !progress(static_cast<double>(loopsDone) / static_cast<double>(loops)))
                    return Failure{"cancelled"};
                const auto where = [&] {
                    return nameOf(course, c) + placeOf(s, course.strings.size(), stop) + ": ";
                };
                Result<string::Strung> stopped = stop == 0 ? Result<string::Strung>(open)
                                                           : string::stoppedAt(open, std::exp2(-stop / 12.0));
                if (!stopped)
                    return Failure{where() + stopped.error().message};

                // Warm starts: the other strings of a course from the first one, each fret from the one
                // below.
                const SpeakingString* neighbour = nullptr;
                if (s > 0)
                    neighbour = &design->strings.back().stops[static_cast<std::size_t>(stop)];
                else if (stop > 0)
                    neighbour = &string.stops.back();
                Result<LoopDesign> loop = neighbour ? retuneLoop(neighbour->loop, stopped->partials, settings)
                                                    : makeLoop(stopped->partials, settings);
                if (!loop)
                    return Failure{where() + loop.error().message};
                design->longestT60 = std::max(design->longestT60, stopped->partials.t60(1.0));
                string.stops.push_back(speaking(*stopped, *std::move(loop), course, neighbour));
                ++loopsDone;
            }
            design->strings.push_back(std::move(string));
        }
    }
    if (progress)
        progress(1.0);
    return std::shared_ptr<const InstrumentDesign>(std::move(design));
}

} // namespace hitchpin::design
