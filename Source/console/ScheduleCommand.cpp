#include "Source/console/Command.h"
#include "Source/console/Reading.h"
#include "Source/document/WholeFile.h"
#include "Source/report/Schedule.h"

#include <iostream>

namespace hitchpin::console {

namespace {

bool writeText(const std::string& path, const std::string& text) {
    const auto written = document::writeWhole(
        fileNamed(path), [&](juce::OutputStream& out) { return out.write(text.data(), text.size()); });
    if (written.failed())
        say(written.getErrorMessage().toStdString());
    return written.wasOk();
}

Exit run(const Arguments& arguments) {
    const auto read = readInstrument(arguments.file(), report::partialsForSchedule);
    if (!read)
        return failed;
    const auto schedule = report::makeSchedule(read->instrument, read->described);
    bool all = true;
    if (const auto csv = arguments.text("--csv"))
        all = writeText(*csv, report::toCsv(schedule)) && all;
    if (const auto json = arguments.text("--json"))
        all = writeText(*json, report::toJson(schedule)) && all;
    std::cout << report::toTable(schedule);
    return all ? well : failed;
}

} // namespace

const Command& scheduleCommand() {
    static const Command command{"schedule",
                                 "FILE [--csv F] [--json F]",
                                 "Prints the stringing schedule: what each string is, pulls and bears.",
                                 {{"--csv", "F", "also as comma-separated values, full precision"},
                                  {"--json", "F", "also as JSON, full precision, with partials and decay times"}},
                                 true,
                                 run};
    return command;
}

} // namespace hitchpin::console
