// From notes and pedals to strings: which course a key takes, how hard the hand plucks, when dampers fall.
// The one place for console and plug-in.
#pragma once

#include "dsp/engine/Engine.h"

#include <array>
#include <memory>
#include <span>
#include <utility>
#include <vector>

namespace hitchpin::playing {

/// Peak of the sound in newtons of bridge force that is written as digital full scale.
inline constexpr double fullScaleNewtons = 20.0;

/// How keys take courses. asBuilt: the nearest course at or below within its frets, notes together shared out so
/// that they take different courses: a course that no key holds before one that is held, then the highest open one,
/// then the one whose last note is longest ago. A repeated note takes its own course again. Where every course that
/// could sound a key is held, the one taken first gives way. everyKeyStrung: the description already holds a course
/// for each key.
enum class KeyTaking { asBuilt, everyKeyStrung };

struct VelocityPoint {
    double velocity; ///< MIDI velocity 1…127
    double factor;   ///< times the force
};

/// Nearer to an end than 0.02 of its length nobody can take a string.
constexpr double pluckable(double ratio) noexcept { return ratio < 0.02 ? 0.02 : ratio > 0.98 ? 0.98 : ratio; }

/// How this instrument is played by default.
struct Rules {
    double pluckPointOffset = 0.0; ///< that the design has in its pluck ratios already
    double width = 0.003;   ///< m
    double force = 2.0;     ///< N at factor 1
    double angle = 0.7853981633974483; ///< rad from across towards into
    std::vector<VelocityPoint> velocity; ///< by rising velocity, linear between; empty: (v/64)
    KeyTaking keys = KeyTaking::asBuilt;
    bool channelPerCourse = false; ///< MIDI channel c plays course c−1 alone
};

/// What a player changes while playing: neutral factors and offsets on the rules.
struct Hand {
    /// Added to the ratio, which is kept `pluckable`. At once; exact (Release.h) when a design made for it has come.
    double pluckPointOffset = 0.0;
    double widthFactor = 1.0;
    double angleOffset = 0.0;      ///< rad
    double forceFactor = 1.0;
    double dampingFactor = 1.0;    ///< times the damper's hold: 2 damps twice as fast
};

struct Event {
    enum class Kind { noteOn, noteOff, sustain, allNotesOff, allSoundOff };
    int frame = 0;      ///< offset in the block
    Kind kind = Kind::noteOn;
    int channel = 1;    ///< 1…16
    int key = 60;
    double value = 0.0; ///< velocity 0…127, or pedal 0…127
};

/// What a key would do, for keyboards on screen. Of several courses the one that counts most.
enum class KeyState { silent, stopped, open };

/// What one course would do for a key.
constexpr KeyState keyStateOf(int key, int openKey, int frets) noexcept {
    return key == openKey                              ? KeyState::open
           : key > openKey && key - openKey <= frets ? KeyState::stopped
                                                       : KeyState::silent;
}

/// Of all keys, for an instrument that need not be designed yet.
std::array<KeyState, 128> keyStates(const design::InstrumentDescription&);

/// Real-time safe after construction, as the engine. One thread at a time.
class Player {
public:
    Player(std::shared_ptr<const design::InstrumentDesign>, Rules);

    void reset() noexcept;
    /// Goes on with what `before` plays, keys and pedals included (Engine::takeOver). False, and nothing done, where the two do
    /// not have the same courses or the strings cannot be taken over.
    bool takeOver(Player& before) noexcept;
    bool takingOver() const noexcept;
    void setHand(const Hand&) noexcept;
    void listen(const engine::Listening&) noexcept;

    /// `events` by rising frame. Writes newtons of bridge force. `right` may be null.
    void process(std::span<const Event> events, double* left, double* right, int frames) noexcept;

    /// Puts out the `count` sounding strings that carry the least energy, as if touched: for machines that cannot
    /// run them all. Costs a look at every sounding string. Returns how many were put out.
    int putOutQuietest(int count) noexcept;

    bool silent() const noexcept;
    int ringingStrings() const noexcept;
    KeyState keyState(int key) const noexcept;
    const engine::Engine& engine() const noexcept;

private:
    struct Course {
        int key = -1;           ///< the key that took it last, −1 for none since the start
        int channel = 0;
        int stop = 0;           ///< fret at which it speaks
        bool held = false;      ///< that key is still down
        bool sustained = false; ///< the key is up, the pedal holds the note
        unsigned long taken = 0; ///< when, in order of taking; 0 for never
    };

    void handle(const Event&) noexcept;
    void noteOn(const Event&) noexcept;
    void noteOff(int channel, int key) noexcept;
    void movePedal(int channel, bool down) noexcept;
    void release(std::size_t course) noexcept;
    void pluck(std::size_t course, double velocity) noexcept;
    void damp(std::size_t course, double t60) noexcept;
    void dampUnlessHeld(std::size_t course) noexcept;
    int courseFor(int key, int channel) const noexcept;
    bool reaches(std::size_t course, int key) const noexcept;
    bool pedalHolds() const noexcept;
    double damperT60(int key) const noexcept;
    double factorFor(double velocity) const noexcept;

    engine::Engine engine_;
    Rules rules_;
    Hand hand_;
    std::vector<Course> courses_;
    std::vector<std::pair<double, int>> byEnergy_; ///< room for putOutQuietest
    std::array<bool, 16> pedals_{};
    unsigned long takings_ = 0;
};

} // namespace hitchpin::playing
