#include "dsp/engine/Engine.h"

#include "dsp/engine/Bridge.h"
#include "dsp/engine/Rail.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

namespace hitchpin::engine {
namespace {

/// All that depends on anything but the sound itself happens where the sample clock is a multiple of these, so that
/// it cannot depend on the host's blocks.
constexpr std::int64_t tile = longestChunk;
constexpr std::int64_t restCheck = 16 * tile;

/// A rail with less energy rests: on a guitar string about 4e-10 N at the bridge, 214 dB under 20 N.
constexpr double restEnergy = 1e-22; // J
/// A bridge that has moved less since the last check brings nothing that is worth computing: in a second it would
/// bring a string of 1 kg/s 1e-22 J.
constexpr double restVelocity = 1e-11; // m/s

/// Loops a string has for its stops: one that speaks and those that are still being put out.
constexpr int slotCount = 3;

// Times that a hand or a felt takes, s. Common practice: short against an attack, long against a click.
constexpr double putOutAtFinger = 0.030;
constexpr double silenced = 0.005;
constexpr double damperFalls = 0.005;
constexpr double damperLeaves = 0.001;
constexpr double listeningMoves = 0.005;
constexpr double takesOver = 0.020;

enum Side { left, right, plain };
/// What is heard on either side, and of the plain sum.
using Gains = std::array<double, 3>;

/// What is heard at a place 0…1 from left to right: constant power, and the sum as it stands in the middle.
Gains gainsAt(double place, double spread, double directed) {
    const double turn = std::numbers::pi * (0.25 + 0.5 * spread * (place - 0.5));
    return {std::numbers::sqrt2 * std::cos(turn) * directed, std::numbers::sqrt2 * std::sin(turn) * directed, directed};
}

} // namespace

struct Engine::Running {
    struct Slot {
        std::array<Rail, 2> rails;
        int stop = 0;

        bool running() const noexcept { return rails[across].running() || rails[into].running(); }
        /// Free for another stop: nothing of it will be heard any more.
        bool over() const noexcept { return !running() || rails[across].presence.isZero(); }
    };

    struct String {
        std::vector<RailLoop> stops;
        std::vector<Slot> slots;
        int speaking = 0;
        double damperT60 = 0.0; ///< 0: lifted
        double impedance = 0.0;
        bool freeBridge = false;
        int bridge = -1;        ///< whose motion it shares; −1 where that is rigid, or its end free
        board::Sharing place;   ///< on its board
        double position = 0.5;
        std::array<Gains, 2> heardFrom{}, heardTo{}; ///< by direction
    };

    /// A board with all bridges on it.
    struct Driven {
        Bridge bridge;
        std::vector<int> strings;
        std::vector<Gains> heardFrom, heardTo; ///< by source
        std::int64_t stillUntil = 0;  ///< after `silence` nothing is woken by it until what rang is out
    };

    explicit Running(std::shared_ptr<const design::InstrumentDesign>);

    String* find(int string) noexcept {
        return string >= 0 && string < static_cast<int>(strings.size()) ? &strings[static_cast<std::size_t>(string)]
                                                                        : nullptr;
    }
    int samples(double seconds) const noexcept { return std::max(1, static_cast<int>(seconds * sampleRate)); }

    void reset() noexcept;
    void speak(String&, int stop, double putOutSeconds) noexcept;
    double holdFor(const String&, const RailLoop&) const noexcept;
    void wake(Driven&) noexcept;
    bool movesWith(const String& string, Direction direction) const noexcept {
        return string.bridge >= 0 &&
               bridges[static_cast<std::size_t>(string.bridge)].bridge.firstComponent(direction) >= 0;
    }
    bool heardByBoard(const String& string) const noexcept {
        return string.bridge >= 0 && bridges[static_cast<std::size_t>(string.bridge)].bridge.heardByBoard();
    }
    void setListening(const Listening&) noexcept;

    void run(double* leftOut, double* rightOut, int count) noexcept;
    void runBridge(Driven&, double* leftOut, double* rightOut, int count) noexcept;
    void runAlone(const String&, Rail&, Direction, double* leftOut, double* rightOut, int count) noexcept;
    void hearString(const String&, const Rail&, Direction, const double* force, double* leftOut, double* rightOut,
                    int offset, int count) noexcept;
    void hear(const Gains& from, const Gains& to, const double* heard, double* leftOut, double* rightOut, int offset,
              int count) noexcept;
    void restWhatIsOver() noexcept;
    bool canTakeOver(const Running& before) const noexcept;
    void takeOver(Running& before) noexcept;

    double energyOf(const String& string, const Rail& rail) const noexcept {
        return string.impedance * rail.sumOfSquares() / sampleRate;
    }

    std::shared_ptr<const design::InstrumentDesign> design;
    double sampleRate;
    std::vector<String> strings;
    std::vector<Driven> bridges;
    std::int64_t clock = 0; ///< the next sample
    bool takingOver = false; ///< looked at when resting is

    Listening listening;
    std::int64_t listeningSettled = 0; ///< sample from which `heardTo` holds alone

    /// Waves of the rails of one bridge within a chunk, longestChunk each.
    std::vector<double> waves;
    struct Port {
        const String* string;
        Rail* rail;
        Direction direction;
    };
    std::vector<Port> ports;
};

Engine::Running::Running(std::shared_ptr<const design::InstrumentDesign> given)
    : design(std::move(given)), sampleRate(design->sampleRate) {
    for (const auto& board : design->boards)
        bridges.push_back({Bridge(board, sampleRate), {}, {}, {}, 0});
    strings.reserve(design->strings.size());
    for (const auto& from : design->strings) {
        String& string = strings.emplace_back();
        for (const auto& stop : from.stops)
            string.stops.emplace_back(stop, from.ends);
        string.slots.assign(slotCount, Slot{{Rail(string.stops), Rail(string.stops)}, 0});
        string.impedance = from.impedance;
        string.freeBridge = from.ends.bridge == string::End::free;
        string.position = std::clamp(from.bridgePosition, 0.0, 1.0);
        Driven& driven = bridges[static_cast<std::size_t>(from.board)];
        if (!string.freeBridge && !driven.bridge.rigid()) {
            string.bridge = from.board;
            string.place = from.place;
            driven.strings.push_back(static_cast<int>(strings.size()) - 1);
        }
    }
    std::size_t mostPorts = 1;
    for (Driven& driven : bridges) {
        mostPorts = std::max(mostPorts, driven.strings.size() * slotCount * 2);
        driven.heardFrom.resize(static_cast<std::size_t>(driven.bridge.sources()));
        driven.heardTo = driven.heardFrom;
    }
    ports.reserve(mostPorts);
    waves.assign(mostPorts * longestChunk, 0.0);
    reset();
}

void Engine::Running::reset() noexcept {
    clock = 0;
    takingOver = false;
    for (String& string : strings) {
        string.speaking = 0;
        string.damperT60 = 0.0;
        for (Slot& slot : string.slots) {
            slot.stop = 0;
            for (Rail& rail : slot.rails)
                rail.speak(string.stops.front());
        }
    }
    for (Driven& driven : bridges) {
        driven.bridge.clear();
        driven.stillUntil = 0;
    }
    setListening(listening);
}

bool Engine::Running::canTakeOver(const Running& before) const noexcept {
    if (takingOver || before.takingOver || sampleRate != before.sampleRate || strings.size() != before.strings.size() ||
        bridges.size() != before.bridges.size())
        return false;
    for (std::size_t i = 0; i < strings.size(); ++i) {
        const String &own = strings[i], &other = before.strings[i];
        if (own.stops.size() != other.stops.size() || own.freeBridge != other.freeBridge ||
            (own.bridge < 0) != (other.bridge < 0) || own.stops.front().freeNut != other.stops.front().freeNut)
            return false;
        for (std::size_t s = 0; s < own.slots.size(); ++s)
            for (const Direction direction : {across, into})
                if (!own.slots[s].rails[direction].canTakeOver(other.slots[s].rails[direction]))
                    return false;
    }
    return true;
}

void Engine::Running::takeOver(Running& before) noexcept {
    clock = before.clock;
    takingOver = true;
    for (std::size_t i = 0; i < strings.size(); ++i) {
        String& string = strings[i];
        String& other = before.strings[i];
        string.speaking = other.speaking;
        string.damperT60 = other.damperT60;
        string.heardFrom = other.heardFrom;
        string.heardTo = other.heardTo;
        for (std::size_t s = 0; s < string.slots.size(); ++s) {
            Slot& slot = string.slots[s];
            slot.stop = other.slots[s].stop;
            for (const Direction direction : {across, into}) {
                Rail& rail = slot.rails[direction];
                rail.takeOver(other.slots[s].rails[direction], string.stops[static_cast<std::size_t>(slot.stop)],
                              samples(takesOver));
                rail.hold.jump(holdFor(string, rail.loop()));
            }
        }
    }
    for (std::size_t b = 0; b < bridges.size(); ++b) {
        bridges[b].bridge.takeOver(before.bridges[b].bridge);
        bridges[b].stillUntil = before.bridges[b].stillUntil;
        // Same size: no allocation.
        if (bridges[b].heardTo.size() == before.bridges[b].heardTo.size()) {
            bridges[b].heardFrom = before.bridges[b].heardFrom;
            bridges[b].heardTo = before.bridges[b].heardTo;
        }
    }
    // Another pan or place is reached as a listener would move there.
    listeningSettled = before.listeningSettled;
    setListening(before.listening);
}

// Playing ------------------------------------------------------------------------------------------------------

double Engine::Running::holdFor(const String& string, const RailLoop& loop) const noexcept {
    return string.damperT60 > 0.0 ? std::pow(10.0, -3.0 * loop.roundTrip / (sampleRate * string.damperT60)) : 1.0;
}

/// A clean slot takes over; the one that spoke is put out. A third that has not yet gone gives way: the one with
/// the least energy.
void Engine::Running::speak(String& string, int stop, double putOutSeconds) noexcept {
    Slot& old = string.slots[static_cast<std::size_t>(string.speaking)];
    if (old.running()) {
        for (Rail& rail : old.rails)
            rail.presence.move(0.0, samples(putOutSeconds));
        int taken = -1;
        double least = 0.0;
        for (int i = 0; i < slotCount; ++i) {
            const Slot& slot = string.slots[static_cast<std::size_t>(i)];
            if (i == string.speaking)
                continue;
            double energy = 0.0;
            if (!slot.over())
                for (const Rail& rail : slot.rails)
                    energy += energyOf(string, rail);
            if (taken < 0 || energy < least) {
                taken = i;
                least = energy;
            }
        }
        string.speaking = taken;
    }
    Slot& fresh = string.slots[static_cast<std::size_t>(string.speaking)];
    fresh.stop = stop;
    for (Rail& rail : fresh.rails) {
        rail.speak(string.stops[static_cast<std::size_t>(stop)]);
        rail.hold.jump(holdFor(string, rail.loop()));
    }
}

/// Every string on a bridge that moves may move with it, from the first sample on. One that rests loads the bridge
/// with Z0 and swallows what it is given; so does one under its damper, which would give back some of it for a tenth
/// of a second or so, far below what plays: that is left out, and with it most of the work on a damped instrument.
void Engine::Running::wake(Driven& driven) noexcept {
    for (const int index : driven.strings) {
        String& string = strings[static_cast<std::size_t>(index)];
        for (const Direction direction : {across, into})
            if (string.damperT60 <= 0.0 && driven.bridge.firstComponent(direction) >= 0)
                string.slots[static_cast<std::size_t>(string.speaking)].rails[direction].wake();
    }
}

void Engine::Running::setListening(const Listening& wanted) noexcept {
    // Where the last move has not ended, the next starts from where it stands.
    const double share = clock < listeningSettled
                             ? 1.0 - static_cast<double>(listeningSettled - clock) / samples(listeningMoves)
                             : 1.0;
    listening = wanted;
    const auto turn = [share](Gains& from, Gains& to, const Gains& next) {
        for (std::size_t side = 0; side < next.size(); ++side)
            from[side] += share * (to[side] - from[side]);
        to = next;
    };
    for (String& string : strings)
        for (const Direction direction : {across, into}) {
            const double directed = direction == across ? std::cos(wanted.angle) : std::sin(wanted.angle);
            turn(string.heardFrom[direction], string.heardTo[direction],
                 gainsAt(string.position, wanted.spread, directed));
        }
    for (Driven& driven : bridges)
        for (int i = 0; i < driven.bridge.sources(); ++i) {
            const Bridge::Source& source = driven.bridge.source(i);
            turn(driven.heardFrom[static_cast<std::size_t>(i)], driven.heardTo[static_cast<std::size_t>(i)],
                 gainsAt(source.place, wanted.spread, std::cos(source.angle - wanted.angle)));
        }
    listeningSettled = clock == 0 ? 0 : clock + samples(listeningMoves);
}

// Sounding -----------------------------------------------------------------------------------------------------

/// A chunk that does not cross a tile.
void Engine::Running::run(double* leftOut, double* rightOut, int count) noexcept {
    std::fill_n(leftOut, count, 0.0);
    if (rightOut != nullptr)
        std::fill_n(rightOut, count, 0.0);
    for (Driven& driven : bridges)
        runBridge(driven, leftOut, rightOut, count);
    for (String& string : strings)
        for (Slot& slot : string.slots)
            for (const Direction direction : {across, into})
                if (!movesWith(string, direction))
                    runAlone(string, slot.rails[direction], direction, leftOut, rightOut, count);
    clock += count;
    if (clock % tile == 0) {
        for (String& string : strings)
            for (Slot& slot : string.slots)
                for (Rail& rail : slot.rails)
                    if (rail.running())
                        rail.flush();
        for (Driven& driven : bridges)
            driven.bridge.flush();
        if (clock % restCheck == 0)
            restWhatIsOver();
    }
}

/// Every loop is longer than the steps taken here, so that all arriving waves are known before the junction: it is
/// exact at every sample.
void Engine::Running::runBridge(Driven& driven, double* leftOut, double* rightOut, int count) noexcept {
    Bridge& bridge = driven.bridge;
    if (bridge.rigid())
        return;
    ports.clear();
    bridge.startLoad();
    int step = count;
    for (const int index : driven.strings) {
        String& string = strings[static_cast<std::size_t>(index)];
        for (int i = 0; i < slotCount; ++i)
            for (const Direction direction : {across, into}) {
                Rail& rail = string.slots[static_cast<std::size_t>(i)].rails[direction];
                // A string at rest still holds the bridge.
                if (rail.running() || i == string.speaking)
                    bridge.addLoad(direction, string.place, string.impedance);
                if (rail.running() && bridge.firstComponent(direction) >= 0) {
                    ports.push_back({&string, &rail, direction});
                    step = std::min(step, rail.delay());
                }
            }
    }
    if (ports.empty() && !bridge.ringing())
        return;
    bridge.endLoad();

    for (int offset = 0; offset < count; offset += step) {
        step = std::min(step, count - offset);
        bridge.clearDrive(step);
        double* wave = waves.data();
        for (const Port& port : ports) {
            port.rail->arrive(wave, step, clock + offset);
            bridge.addDrive(port.direction, port.string->place, 2.0 * port.string->impedance, wave, step);
            wave += longestChunk;
        }
        bridge.run(step);
        for (int i = 0; i < bridge.sources(); ++i)
            hear(driven.heardFrom[static_cast<std::size_t>(i)], driven.heardTo[static_cast<std::size_t>(i)],
                 bridge.heard(i), leftOut, rightOut, offset, step);
        wave = waves.data();
        std::array<double, longestChunk> velocity, force;
        for (const Port& port : ports) {
            bridge.velocity(port.direction, port.string->place, velocity.data(), step);
            for (int i = 0; i < step; ++i) {
                const auto at = static_cast<std::size_t>(i);
                const double in = wave[i], out = velocity[at] - in;
                force[at] = port.string->impedance * (in - out);
                wave[i] = out;
            }
            port.rail->leave(wave, step);
            hearString(*port.string, *port.rail, port.direction, force.data(), leftOut, rightOut, offset, step);
            wave += longestChunk;
        }
    }
}

/// A rail whose bridge end is rigid (out = −in) or free (out = +in; the end then moves with 2·in).
void Engine::Running::runAlone(const String& string, Rail& rail, Direction direction, double* leftOut,
                               double* rightOut, int count) noexcept {
    if (!rail.running())
        return;
    std::array<double, longestChunk> wave, force;
    const double sign = string.freeBridge ? 1.0 : -1.0;
    int step = std::min(count, rail.delay());
    for (int offset = 0; offset < count; offset += step) {
        step = std::min(step, count - offset);
        rail.arrive(wave.data(), step, clock + offset);
        for (int i = 0; i < step; ++i) {
            const auto at = static_cast<std::size_t>(i);
            force[at] = 2.0 * string.impedance * wave[at];
            wave[at] *= sign;
        }
        rail.leave(wave.data(), step);
        hearString(string, rail, direction, force.data(), leftOut, rightOut, offset, step);
    }
}

/// The force at the bridge, or where the string is listened to at another place Z0 times its velocity there.
void Engine::Running::hearString(const String& string, const Rail& rail, Direction direction, const double* force,
                                 double* leftOut, double* rightOut, int offset, int count) noexcept {
    std::array<double, longestChunk> atPlace;
    if (const double* velocity = rail.heard()) {
        for (int i = 0; i < count; ++i)
            atPlace[static_cast<std::size_t>(i)] = string.impedance * velocity[i];
        force = atPlace.data();
    } else if (heardByBoard(string)) {
        return;
    }
    hear(string.heardFrom[direction], string.heardTo[direction], force, leftOut, rightOut, offset, count);
}

void Engine::Running::hear(const Gains& from, const Gains& to, const double* heard, double* leftOut, double* rightOut,
                           int offset, int count) noexcept {
    const auto share = [&](int i) {
        const std::int64_t toGo = listeningSettled - (clock + offset + i);
        return toGo > 0 ? 1.0 - static_cast<double>(toGo) / samples(listeningMoves) : 1.0;
    };
    const bool moving = clock + offset < listeningSettled;
    const auto add = [&](double* sum, double a, double b) {
        if (moving) {
            for (int i = 0; i < count; ++i)
                sum[i] += ((1.0 - share(i)) * a + share(i) * b) * heard[i]; // b itself, to the bit, once settled
        } else {
            for (int i = 0; i < count; ++i)
                sum[i] += b * heard[i];
        }
    };
    if (rightOut == nullptr) {
        add(leftOut + offset, from[plain], to[plain]);
        return;
    }
    add(leftOut + offset, from[left], to[left]);
    add(rightOut + offset, from[right], to[right]);
}

void Engine::Running::restWhatIsOver() noexcept {
    for (Driven& driven : bridges)
        if (driven.bridge.peak() >= restVelocity && clock >= driven.stillUntil)
            wake(driven);
    for (String& string : strings)
        for (Slot& slot : string.slots)
            for (const Direction direction : {across, into}) {
                Rail& rail = slot.rails[direction];
                if (!rail.running())
                    continue;
                if (rail.presence.isZero()) {
                    rail.clear();
                    continue;
                }
                if (rail.releases.pending())
                    continue;
                const bool fed = movesWith(string, direction) && string.damperT60 <= 0.0 &&
                                 bridges[static_cast<std::size_t>(string.bridge)].bridge.peak() >= restVelocity;
                if (!fed && energyOf(string, rail) < restEnergy)
                    rail.clear();
            }
    for (Driven& driven : bridges) {
        driven.bridge.rest(restEnergy);
        driven.bridge.forgetPeak();
    }
    const auto stillTakesOver = [](const String& string) {
        return std::any_of(string.slots.begin(), string.slots.end(), [](const Slot& slot) {
            return slot.rails[across].takingOver() || slot.rails[into].takingOver();
        });
    };
    takingOver = takingOver && std::any_of(strings.begin(), strings.end(), stillTakesOver);
}

// The public face ----------------------------------------------------------------------------------------------

Engine::Engine(std::shared_ptr<const design::InstrumentDesign> design)
    : running_(std::make_unique<Running>(std::move(design))) {}
Engine::~Engine() = default;

void Engine::reset() noexcept { running_->reset(); }

bool Engine::takeOver(Engine& before) noexcept {
    if (!running_->canTakeOver(*before.running_))
        return false;
    running_->takeOver(*before.running_);
    return true;
}

bool Engine::takingOver() const noexcept { return running_->takingOver; }

void Engine::pluck(int index, const Pluck& pluck) noexcept {
    Running& r = *running_;
    Running::String* string = r.find(index);
    if (string == nullptr || !std::isfinite(pluck.force) || !std::isfinite(pluck.pointRatio) ||
        !std::isfinite(pluck.width) || !std::isfinite(pluck.angle))
        return;
    // A string that is being put out starts afresh beside what is still sinking.
    const int stop = string->slots[static_cast<std::size_t>(string->speaking)].stop;
    for (const Rail& rail : string->slots[static_cast<std::size_t>(string->speaking)].rails)
        if (!rail.presence.isOne()) {
            r.speak(*string, stop, silenced);
            break;
        }
    const auto& design = r.design->strings[static_cast<std::size_t>(index)];
    const double samplesPerMetre = r.sampleRate / design.stops[static_cast<std::size_t>(stop)].waveSpeed;
    const double step = 0.5 * pluck.force / string->impedance; // of velocity, each way
    const std::array<double, 2> share{std::cos(pluck.angle), std::sin(pluck.angle)};
    Running::Slot& slot = string->slots[static_cast<std::size_t>(string->speaking)];
    for (const Direction direction : {across, into}) {
        // Turning a right angle to the other direction leaves a rounding error that is no pluck.
        if (std::abs(share[direction]) < 1e-12 || step == 0.0)
            continue;
        Rail& rail = slot.rails[direction];
        const RailLoop& loop = rail.loop();
        rail.releases.add(Release(r.clock,
                                  {step * share[direction], std::clamp(pluck.pointRatio, 0.0, 1.0),
                                   std::max(0.0, pluck.width) * samplesPerMetre, loop.roundTrip, loop.period,
                                   loop.freeNut, string->freeBridge},
                                  loop.plucked),
                          r.clock);
        rail.wake();
        if (r.movesWith(*string, direction)) {
            Running::Driven& driven = r.bridges[static_cast<std::size_t>(string->bridge)];
            driven.stillUntil = r.clock;
            r.wake(driven);
        }
    }
}

void Engine::stopAt(int index, int stop) noexcept {
    Running::String* string = running_->find(index);
    if (string == nullptr || stop < 0 || stop >= static_cast<int>(string->stops.size()) ||
        string->slots[static_cast<std::size_t>(string->speaking)].stop == stop)
        return;
    running_->speak(*string, stop, putOutAtFinger);
}

void Engine::damp(int index, double t60) noexcept {
    Running& r = *running_;
    Running::String* string = r.find(index);
    if (string == nullptr || !std::isfinite(t60))
        return;
    string->damperT60 = std::max(0.0, t60);
    const int time = r.samples(string->damperT60 > 0.0 ? damperFalls : damperLeaves);
    for (Rail& rail : string->slots[static_cast<std::size_t>(string->speaking)].rails) {
        const double hold = r.holdFor(*string, rail.loop());
        if (rail.running())
            rail.hold.move(hold, time);
        else
            rail.hold.jump(hold);
    }
    if (string->damperT60 <= 0.0 && string->bridge >= 0) {
        Running::Driven& driven = r.bridges[static_cast<std::size_t>(string->bridge)];
        if (driven.bridge.peak() >= restVelocity && r.clock >= driven.stillUntil)
            r.wake(driven);
    }
}

void Engine::silence() noexcept {
    for (int index = 0; index < static_cast<int>(running_->strings.size()); ++index)
        silence(index);
    for (Running::Driven& driven : running_->bridges) {
        driven.bridge.fade(running_->samples(silenced));
        driven.stillUntil = running_->clock + running_->samples(silenced) + restCheck;
    }
}

void Engine::silence(int index) noexcept {
    if (Running::String* string = running_->find(index))
        for (Running::Slot& slot : string->slots)
            for (Rail& rail : slot.rails)
                if (rail.running())
                    rail.presence.move(0.0, running_->samples(silenced));
}

void Engine::listen(const Listening& listening) noexcept {
    if (!std::isfinite(listening.angle) || !std::isfinite(listening.spread))
        return;
    // Hosts say where they listen at every block: only a change moves anything.
    const Listening wanted{listening.angle, std::clamp(listening.spread, 0.0, 1.0)};
    if (wanted != running_->listening)
        running_->setListening(wanted);
}

void Engine::process(double* left, double* right, int frames) noexcept {
    for (int done = 0; done < frames;) {
        const int count = std::min(frames - done, static_cast<int>(tile - running_->clock % tile));
        running_->run(left + done, right != nullptr ? right + done : nullptr, count);
        done += count;
    }
}

double Engine::energy() const noexcept {
    double sum = 0.0;
    for (int index = 0; index < static_cast<int>(running_->strings.size()); ++index)
        sum += energy(index);
    for (const Running::Driven& driven : running_->bridges)
        sum += driven.bridge.energy();
    return sum;
}

double Engine::energy(int index) const noexcept {
    const Running::String* string = running_->find(index);
    double sum = 0.0;
    if (string != nullptr)
        for (const Running::Slot& slot : string->slots)
            for (const Rail& rail : slot.rails)
                if (rail.running())
                    sum += running_->energyOf(*string, rail);
    return sum;
}

bool Engine::silent() const noexcept {
    return ringingStrings() == 0 && std::none_of(running_->bridges.begin(), running_->bridges.end(),
                                                 [](const auto& driven) { return driven.bridge.ringing(); });
}

int Engine::ringingStrings() const noexcept {
    return static_cast<int>(std::count_if(running_->strings.begin(), running_->strings.end(), [](const auto& string) {
        return std::any_of(string.slots.begin(), string.slots.end(), [](const auto& slot) { return slot.running(); });
    }));
}

/// What left the bridge γT/2 ago is at γ on its way out; what left it T − γT/2 ago is there on its way back, turned
/// over where the nut is rigid.
double Engine::velocityAt(int index, bool isAcross, double ratioFromBridge) const noexcept {
    const Running::String* string = running_->find(index);
    if (string == nullptr)
        return 0.0;
    const Rail& rail = string->slots[static_cast<std::size_t>(string->speaking)].rails[isAcross ? across : into];
    const double roundTrip = rail.loop().roundTrip, way = 0.5 * std::clamp(ratioFromBridge, 0.0, 1.0) * roundTrip;
    const double turned = rail.loop().freeNut ? 1.0 : -1.0;
    return rail.left(way) + turned * rail.left(roundTrip - way);
}

const design::InstrumentDesign& Engine::design() const noexcept { return *running_->design; }

} // namespace hitchpin::engine
