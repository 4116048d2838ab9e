// Instruments of known numbers for tests of the engine: ideal strings without filters, or real ones.
#pragma once

#include "dsp/design/InstrumentDesign.h"

#include <algorithm>
#include <cmath>
#include <memory>
#include <stdexcept>
#include <utility>
#include <vector>

namespace hitchpin::support {

struct IdealString {
    int periodSamples = 200;   ///< once round the string
    double impedance = 0.5;    ///< kg/s
    string::Ends ends{};
    double gain = 1.0;         ///< once round
    int board = 0;
};

inline constexpr double idealRate = 48000.0;

/// A string that speaks from one stop with this loop; `roundTrip` in samples.
inline design::StringDesign stringOf(const design::LoopDesign& loop, double roundTrip, double impedance,
                                     const string::Ends& ends) {
    design::SpeakingString open;
    open.loop = loop;
    open.speakingLength = 1.0;
    open.waveSpeed = 2.0 * open.speakingLength * loop.sampleRate / roundTrip;
    open.tension = impedance * open.waveSpeed;
    design::StringDesign string;
    string.impedance = impedance;
    string.ends = ends;
    string.stops = {open};
    return string;
}

/// A loop that is all delay, so that waves keep their shape and places on the line are places on the string.
inline design::StringDesign idealString(const IdealString& from, int course) {
    design::LoopDesign loop;
    loop.sampleRate = idealRate;
    loop.turn = from.ends.oneFree() ? -1.0 : 1.0;
    // One round trip is a period, or half of one where one end is free.
    loop.firstPartialHz = idealRate / from.periodSamples * (from.ends.oneFree() ? 0.5 : 1.0);
    loop.delay = from.periodSamples - 1;
    loop.thiran = 0.0; // one sample
    loop.gain = from.gain;
    design::StringDesign string = stringOf(loop, from.periodSamples, from.impedance, from.ends);
    string.course = course;
    string.board = from.board;
    return string;
}

inline std::shared_ptr<const design::InstrumentDesign> idealInstrument(const std::vector<IdealString>& strings,
                                                                       const design::BoardDesign& board = {}) {
    auto design = std::make_shared<design::InstrumentDesign>();
    design->sampleRate = idealRate;
    design->boards = {board};
    for (const auto& from : strings) {
        const int index = static_cast<int>(design->strings.size());
        design->strings.push_back(idealString(from, index));
        design::CourseDesign course;
        course.key = 60 + index;
        course.firstString = index;
        design->courses.push_back(course);
    }
    return design;
}

struct RealString {
    const char* material = "music wire";
    double lengthMetres = 0.65;
    double diameterMetres = 0.4e-3;
    double hertz = 220.0;
    int key = 57;
    int strings = 1;
    double detuneCents = 0.0;
    int frets = 0;
    bool damper = false;
    string::Ends ends{};
    int bridge = 0;
    double listeningRatio = 0.0;
};

/// With points for one bridge.
inline board::Board plainBoard(board::BridgeKind kind, int points, double resistance, std::vector<board::Mode> modes = {}) {
    board::Board board{kind, {}, std::move(modes)};
    board::addBridge("", 0, board, points, resistance);
    return board;
}

/// One bridge over all points of the board.
inline design::InstrumentDescription realDescription(const std::vector<RealString>& courses,
                                                     const board::Board& board = {}) {
    design::InstrumentDescription instrument;
    instrument.boards = {board};
    instrument.bridges = {{"bridge", 0, 0, std::max(1, static_cast<int>(board.points.size()))}};
    for (const auto& from : courses) {
        string::Description description;
        description.speakingLength = from.lengthMetres;
        description.build.core = {*string::findBuiltInMaterial(from.material), from.diameterMetres,
                                  string::CoreShape::round, string::Measured::slack};
        description.ends = from.ends;
        design::CourseDescription course;
        course.name = "test";
        course.key = from.key;
        course.openHz = from.hertz;
        course.hasDamper = from.damper;
        course.frets = from.frets;
        course.bridge = from.bridge;
        course.listeningRatio = from.listeningRatio;
        for (int i = 0; i < from.strings; ++i) {
            auto strung = string::strungToPitch(description, from.hertz * std::exp2(i * from.detuneCents / 1200.0));
            if (!strung)
                throw std::runtime_error(strung.error().message);
            course.strings.push_back(std::move(strung).value());
        }
        instrument.courses.push_back(std::move(course));
    }
    return instrument;
}

inline std::shared_ptr<const design::InstrumentDesign> designed(const design::InstrumentDescription& description,
                                                                double sampleRate = 48000.0) {
    auto made = design::makeInstrument(description, {sampleRate, design::Quality::live});
    if (!made)
        throw std::runtime_error(made.error().message);
    return std::move(made).value();
}

inline std::shared_ptr<const design::InstrumentDesign> realInstrument(const std::vector<RealString>& courses,
                                                                      const board::Board& board = {},
                                                                      double sampleRate = 48000.0) {
    return designed(realDescription(courses, board), sampleRate);
}

} // namespace hitchpin::support
