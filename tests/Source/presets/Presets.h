// The presets as the program reads them, and their strings in the order of pitch.
#pragma once

#include "Source/report/Schedule.h"

#include <catch2/catch.hpp>

#include <algorithm>
#include <string>
#include <vector>

namespace hitchpin::presets {

inline const std::vector<std::string> all{"lap-harp",    "wire-harp",  "six-course-steel", "six-course-nylon",
                                          "small-piano", "clavichord", "zither",           "test-wire"};

struct Preset {
    document::Instrument instrument;
    document::Described described;
    report::Schedule schedule;
};

inline juce::File fileOf(const std::string& name) {
    return juce::File(HITCHPIN_PRESETS).getChildFile(juce::String(name) + ".json");
}

/// A preset that does not load or describe ends the test with what was wrong.
inline Preset preset(const std::string& name) {
    const auto said = [&](const document::Problems& problems) {
        std::string text = name;
        for (const auto& problem : problems)
            text += "\n" + problem.message;
        return text;
    };
    auto instrument = document::load(fileOf(name));
    if (!instrument)
        FAIL(said(instrument.error()));
    auto described = document::describe(*instrument);
    if (!described)
        FAIL(said(described.error()));
    auto schedule = report::makeSchedule(*instrument, *described);
    return {*std::move(instrument), *std::move(described), std::move(schedule)};
}

/// Neighbours that a builder would expect to go evenly: courses on one bridge with one core material and one
/// count of windings, by rising pitch. Between sections lies a break. Indices into the courses.
inline std::vector<std::vector<std::size_t>> sections(const Preset& preset) {
    const auto& courses = preset.described.instrument.courses;
    std::vector<std::size_t> order(courses.size());
    for (std::size_t i = 0; i < order.size(); ++i)
        order[i] = i;
    std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
        return courses[a].bridge != courses[b].bridge ? courses[a].bridge < courses[b].bridge
                                                      : courses[a].openHz < courses[b].openHz;
    });
    const auto alike = [&](std::size_t a, std::size_t b) {
        const auto& x = courses[a].strings.front().description.build;
        const auto& y = courses[b].strings.front().description.build;
        return courses[a].bridge == courses[b].bridge && x.core.material.name == y.core.material.name &&
               x.windings.size() == y.windings.size();
    };
    std::vector<std::vector<std::size_t>> found;
    for (const auto i : order) {
        if (found.empty() || !alike(found.back().back(), i))
            found.emplace_back();
        found.back().push_back(i);
    }
    return found;
}

} // namespace hitchpin::presets
