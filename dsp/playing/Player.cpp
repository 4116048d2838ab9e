#include "dsp/playing/Player.h"

#include <algorithm>
#include <cmath>

namespace hitchpin::playing {
namespace {

/// A finger that leaves a fret puts the string out nearly as fast as a damper in the treble. Common practice.
constexpr double fingerLeavesT60 = 0.08; // s

bool isPedalDown(double value) { return value >= 64.0; } // MIDI 1.0: 64…127 is on

} // namespace

Player::Player(std::shared_ptr<const design::InstrumentDesign> design, Rules rules)
    : engine_(std::move(design)), rules_(std::move(rules)), courses_(engine_.design().courses.size()),
      byEnergy_(engine_.design().strings.size()) {
    reset();
}

void Player::reset() noexcept {
    engine_.reset();
    std::fill(courses_.begin(), courses_.end(), Course{});
    pedals_.fill(false);
    takings_ = 0;
    for (std::size_t course = 0; course < courses_.size(); ++course)
        dampUnlessHeld(course);
}

bool Player::takeOver(Player& before) noexcept {
    const auto& own = engine_.design().courses;
    const auto& other = before.engine_.design().courses;
    const auto alike = [](const design::CourseDesign& a, const design::CourseDesign& b) {
        return a.key == b.key && a.stringCount == b.stringCount && a.frets == b.frets && a.hasDamper == b.hasDamper;
    };
    if (!std::equal(own.begin(), own.end(), other.begin(), other.end(), alike) || !engine_.takeOver(before.engine_))
        return false;
    courses_ = before.courses_; // same size: no allocation
    pedals_ = before.pedals_;
    takings_ = before.takings_;
    return true;
}

bool Player::takingOver() const noexcept { return engine_.takingOver(); }

void Player::setHand(const Hand& hand) noexcept { hand_ = hand; }

void Player::listen(const engine::Listening& listening) noexcept { engine_.listen(listening); }

void Player::process(std::span<const Event> events, double* left, double* right, int frames) noexcept {
    int done = 0;
    const auto soundUntil = [&](int frame) {
        if (frame > done) {
            engine_.process(left + done, right != nullptr ? right + done : nullptr, frame - done);
            done = frame;
        }
    };
    for (const Event& event : events) {
        soundUntil(std::clamp(event.frame, done, std::max(done, frames)));
        handle(event);
    }
    soundUntil(frames);
}

// Events ---------------------------------------------------------------------------------------------------------

void Player::handle(const Event& event) noexcept {
    const bool onItsWay = event.channel >= 1 && event.channel <= 16 && std::isfinite(event.value);
    if (!onItsWay)
        return;
    switch (event.kind) {
    case Event::Kind::noteOn:
        if (event.value > 0.0)
            noteOn(event);
        else
            noteOff(event.channel, event.key); // MIDI 1.0: velocity 0 ends a note
        break;
    case Event::Kind::noteOff:
        noteOff(event.channel, event.key);
        break;
    case Event::Kind::sustain:
        movePedal(event.channel, isPedalDown(event.value));
        break;
    case Event::Kind::allNotesOff:
        for (std::size_t course = 0; course < courses_.size(); ++course)
            if (courses_[course].held && courses_[course].channel == event.channel)
                release(course);
        break;
    case Event::Kind::allSoundOff:
        engine_.silence();
        for (Course& course : courses_)
            course.held = course.sustained = false;
        for (std::size_t course = 0; course < courses_.size(); ++course)
            dampUnlessHeld(course);
        break;
    }
}

void Player::noteOn(const Event& event) noexcept {
    const int chosen = courseFor(event.key, event.channel);
    if (chosen < 0)
        return;
    const auto index = static_cast<std::size_t>(chosen);
    const design::CourseDesign& design = engine_.design().courses[index];
    Course& course = courses_[index];
    const int stop = event.key - design.key;
    if (stop != course.stop)
        for (int i = 0; i < design.stringCount; ++i)
            engine_.stopAt(design.firstString + i, stop);
    course = {event.key, event.channel, stop, true, false, ++takings_};
    damp(index, 0.0);
    pluck(index, event.value);
}

void Player::noteOff(int channel, int key) noexcept {
    for (std::size_t course = 0; course < courses_.size(); ++course)
        if (courses_[course].held && courses_[course].key == key && courses_[course].channel == channel)
            release(course);
}

void Player::movePedal(int channel, bool down) noexcept {
    pedals_[static_cast<std::size_t>(channel - 1)] = down;
    // The pedal lifts every damper of the instrument, so that strings nobody plays ring along.
    for (std::size_t index = 0; index < courses_.size(); ++index) {
        Course& course = courses_[index];
        if (pedalHolds()) {
            if (engine_.design().courses[index].hasDamper)
                damp(index, 0.0);
        } else if (course.sustained) {
            release(index);
        } else {
            dampUnlessHeld(index);
        }
    }
}

void Player::release(std::size_t index) noexcept {
    Course& course = courses_[index];
    course.held = false;
    course.sustained = pedalHolds();
    if (course.sustained)
        return;
    const design::CourseDesign& design = engine_.design().courses[index];
    if (design.hasDamper)
        damp(index, damperT60(course.key));
    else if (course.stop > 0)
        damp(index, fingerLeavesT60 / std::max(hand_.dampingFactor, 0.01));
    // An open string without a damper rings on, as a harp's does.
}

// The hand -------------------------------------------------------------------------------------------------------

void Player::pluck(std::size_t index, double velocity) noexcept {
    const design::CourseDesign& design = engine_.design().courses[index];
    engine::Pluck pluck;
    pluck.force = rules_.force * factorFor(velocity) * hand_.forceFactor;
    pluck.pointRatio = pluckable(design.pluckRatio + (hand_.pluckPointOffset - rules_.pluckPointOffset));
    pluck.width = rules_.width * hand_.widthFactor;
    pluck.angle = rules_.angle + hand_.angleOffset;
    for (int i = 0; i < design.stringCount; ++i)
        engine_.pluck(design.firstString + i, pluck);
}

double Player::factorFor(double velocity) const noexcept {
    const auto& points = rules_.velocity;
    if (points.empty())
        return velocity / 64.0;
    const auto above = std::find_if(points.begin(), points.end(),
                                    [&](const VelocityPoint& point) { return point.velocity >= velocity; });
    if (above == points.begin())
        return points.front().factor;
    if (above == points.end())
        return points.back().factor;
    const VelocityPoint& low = *(above - 1);
    const double t = (velocity - low.velocity) / (above->velocity - low.velocity);
    return low.factor + t * (above->factor - low.factor);
}

void Player::damp(std::size_t index, double t60) noexcept {
    const design::CourseDesign& design = engine_.design().courses[index];
    for (int i = 0; i < design.stringCount; ++i)
        engine_.damp(design.firstString + i, t60);
}

void Player::dampUnlessHeld(std::size_t index) noexcept {
    const design::CourseDesign& design = engine_.design().courses[index];
    const Course& course = courses_[index];
    if (design.hasDamper && !course.held && !course.sustained && !pedalHolds())
        damp(index, damperT60(design.key));
}

/// Felt stops a treble sooner than a bass: 0.5 s at A1, halved every two octaves, never under 0.05 s. Common
/// practice for the order of size; a damper's place, width and pressure decide the rest on a real instrument.
double Player::damperT60(int key) const noexcept {
    const double t60 = std::max(0.05, 0.5 * std::exp2((33.0 - key) / 24.0));
    return t60 / std::max(hand_.dampingFactor, 0.01);
}

bool Player::pedalHolds() const noexcept {
    return std::find(pedals_.begin(), pedals_.end(), true) != pedals_.end();
}

// Keys and courses -----------------------------------------------------------------------------------------------

bool Player::reaches(std::size_t course, int key) const noexcept {
    const design::CourseDesign& design = engine_.design().courses[course];
    return keyStateOf(key, design.key, design.frets) != KeyState::silent;
}

int Player::courseFor(int key, int channel) const noexcept {
    if (rules_.channelPerCourse) {
        const auto index = static_cast<std::size_t>(channel - 1);
        return index < courses_.size() && reaches(index, key) ? channel - 1 : -1;
    }
    const auto better = [&](std::size_t a, std::size_t b) {
        const Course &x = courses_[a], &y = courses_[b];
        const bool own = x.key == key && x.channel == channel, owns = y.key == key && y.channel == channel;
        if (own != owns)
            return own;
        if (x.held != y.held)
            return !x.held;
        const int open = engine_.design().courses[a].key, opens = engine_.design().courses[b].key;
        if (!x.held && open != opens)
            return open > opens;
        return x.taken < y.taken;
    };
    int best = -1;
    for (std::size_t i = 0; i < courses_.size(); ++i)
        if (reaches(i, key) && (best < 0 || better(i, static_cast<std::size_t>(best))))
            best = static_cast<int>(i);
    return best;
}

std::array<KeyState, 128> keyStates(const design::InstrumentDescription& instrument) {
    std::array<KeyState, 128> states{};
    for (const design::CourseDescription& course : instrument.courses)
        for (int key = 0; key < 128; ++key) {
            KeyState& state = states[static_cast<std::size_t>(key)];
            state = std::max(state, keyStateOf(key, course.key, course.frets));
        }
    return states;
}

KeyState Player::keyState(int key) const noexcept {
    KeyState state = KeyState::silent;
    for (const design::CourseDesign& course : engine_.design().courses)
        state = std::max(state, keyStateOf(key, course.key, course.frets));
    return state;
}

// What sounds ----------------------------------------------------------------------------------------------------

int Player::putOutQuietest(int count) noexcept {
    // Each string's energy is asked once: it costs a walk along its whole line.
    std::size_t sounding = 0;
    for (int string = 0; string < static_cast<int>(byEnergy_.size()); ++string)
        if (const double energy = engine_.energy(string); energy > 0.0)
            byEnergy_[sounding++] = {energy, string};
    const std::size_t done = std::min(sounding, static_cast<std::size_t>(std::max(0, count)));
    std::partial_sort(byEnergy_.begin(), byEnergy_.begin() + static_cast<std::ptrdiff_t>(done),
                      byEnergy_.begin() + static_cast<std::ptrdiff_t>(sounding));
    for (std::size_t i = 0; i < done; ++i)
        engine_.silence(byEnergy_[i].second);
    return static_cast<int>(done);
}

bool Player::silent() const noexcept { return engine_.silent(); }

int Player::ringingStrings() const noexcept { return engine_.ringingStrings(); }

const engine::Engine& Player::engine() const noexcept { return engine_; }

} // namespace hitchpin::playing
