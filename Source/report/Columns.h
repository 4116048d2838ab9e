// One table of the schedule's columns, from which CSV and JSON derive.
#pragma once

#include "Source/report/Schedule.h"

#include <variant>

namespace hitchpin::report {

struct Column {
    const char* key;  ///< with its unit
    const char* each; ///< of a list: the key of one entry in CSV, '#' for its number
    std::variant<std::string ScheduleRow::*, int ScheduleRow::*, double ScheduleRow::*,
                 std::vector<double> ScheduleRow::*, std::vector<std::string> ScheduleRow::*>
        member;
};

const std::vector<Column>& columns();

} // namespace hitchpin::report
