#include "Source/console/Command.h"
#include "Source/console/Reading.h"
#include "Source/document/Reference.h"
#include "Source/report/Schedule.h"
#include "dsp/tuning/Notes.h"

#include <array>
#include <iostream>

namespace hitchpin::console {

namespace {

std::string counted(std::size_t count, const std::string& one, const std::string& many) {
    return std::to_string(count) + " " + (count == 1 ? one : many);
}

void list(const std::string& heading, const std::vector<std::string>& lines) {
    if (lines.empty())
        return;
    std::cout << heading << "\n";
    for (const auto& line : lines)
        std::cout << "  " << line << "\n";
}

/// Runs of neighbouring keys in that state: "C2-E2, G2".
std::string runs(const std::array<playing::KeyState, 128>& states, playing::KeyState wanted) {
    const auto is = [&](int key) { return key < 128 && states[static_cast<std::size_t>(key)] == wanted; };
    std::string text;
    for (int first = 0; first < 128; ++first) {
        if (!is(first))
            continue;
        int last = first;
        while (is(last + 1))
            ++last;
        text += (text.empty() ? "" : ", ") + tuning::noteName(first) + (last > first ? "-" + tuning::noteName(last) : "");
        first = last;
    }
    return text;
}

Exit run(const Arguments& arguments) {
    const auto read = readInstrument(arguments.file(), report::partialsForSchedule);
    if (!read)
        return failed;
    const auto& courses = read->described.instrument.courses;
    std::size_t strings = 0;
    for (const auto& course : courses)
        strings += course.strings.size();
    const auto states = playing::keyStates(read->described.instrument);
    const auto open = runs(states, playing::KeyState::open), stopped = runs(states, playing::KeyState::stopped);
    std::cout << (read->instrument.name.empty() ? std::string("the instrument") : read->instrument.name) << ": "
              << counted(courses.size(), "course", "courses") << ", " << counted(strings, "string", "strings")
              << "; the file is well formed.\n";
    std::cout << "keys that sound an open course: " << open << "\n";
    if (!stopped.empty())
        std::cout << "keys that sound a stopped one: " << stopped << "\n";

    const auto schedule = report::makeSchedule(read->instrument, read->described);
    std::vector<std::string> marks;
    for (const auto& row : schedule.courses)
        for (const auto& warning : row.warnings)
            marks.push_back(row.note + ": " + warning);
    marks.insert(marks.end(), schedule.warnings.begin(), schedule.warnings.end());
    list("marked:", marks);
    list("the file says, and the sound does not follow yet:", read->described.notHeardYet);
    list("defaults taken:", document::defaultsTaken(read->instrument));
    return well;
}

Exit runKeys(const Arguments&) {
    for (const auto& line : document::keyReference())
        std::cout << line << "\n";
    return well;
}

} // namespace

const Command& checkCommand() {
    static const Command command{"check", "FILE", "Reads the file, says what is marked and which defaults it takes.",
                                 {},      true,   run};
    return command;
}

const Command& keysCommand() {
    static const Command command{"keys", "",    "Lists every key that an instrument file may have.",
                                 {},     false, runKeys};
    return command;
}

} // namespace hitchpin::console
