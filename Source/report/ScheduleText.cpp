// The schedule as CSV, JSON and a table for terminals.
#include "Source/document/JsonText.h"
#include "Source/report/Columns.h"
#include "Source/report/Digits.h"

#include <algorithm>
#include <functional>

namespace hitchpin::report {

namespace {

juce::String utf8(const std::string& text) { return juce::String::fromUTF8(text.data(), static_cast<int>(text.size())); }

juce::var toVar(const std::string& text) { return utf8(text); }
juce::var toVar(int number) { return number; }
juce::var toVar(double number) { return number; }
template <class T>
juce::var toVar(const std::vector<T>& list) {
    juce::Array<juce::var> all;
    for (const auto& item : list)
        all.add(toVar(item));
    return all;
}

std::string joined(const std::vector<std::string>& parts, const char* between) {
    std::string all;
    for (const auto& part : parts)
        all += (all.empty() ? "" : between) + part;
    return all;
}

/// RFC 4180: quoted where a comma, a quote or a line's end stands within, quotes doubled.
std::string csvField(const std::string& text) {
    if (text.find_first_of(",\"\r\n") == std::string::npos)
        return text;
    std::string out = "\"";
    for (const char c : text)
        out += c == '"' ? std::string("\"\"") : std::string(1, c);
    return out + "\"";
}

std::string numbered(std::string pattern, std::size_t number) {
    return pattern.replace(pattern.find('#'), 1, std::to_string(number));
}

std::size_t longest(const Schedule& schedule, std::vector<double> ScheduleRow::*list) {
    std::size_t most = 0;
    for (const auto& row : schedule.courses)
        most = std::max(most, (row.*list).size());
    return most;
}

/// Characters, not bytes.
std::size_t width(const std::string& text) {
    return static_cast<std::size_t>(
        std::count_if(text.begin(), text.end(), [](char c) { return (static_cast<unsigned char>(c) & 0xC0) != 0x80; }));
}

struct TableColumn {
    const char* title;
    bool left;
    std::function<std::string(const ScheduleRow&)> text;
};

const std::vector<TableColumn>& tableColumns() {
    using R = const ScheduleRow&;
    static const std::vector<TableColumn> all{
        {"note", true, [](R r) { return r.note; }},
        {"Hz", false, [](R r) { return fixed(r.pitchHz, 2); }},
        {"strings", false, [](R r) { return std::to_string(r.strings); }},
        {"length mm", false, [](R r) { return fixed(r.speakingLengthMm, 1); }},
        {"core", true, [](R r) { return r.core; }},
        {"windings", true, [](R r) { return r.windings; }},
        {"outer mm", false, [](R r) { return measure(r.outerDiameterMm); }},
        {"g/m", false, [](R r) { return threeDigits(r.linearDensityKgM * 1e3); }},
        {"N each", false, [](R r) { return threeDigits(r.tensionN); }},
        {"N course", false, [](R r) { return threeDigits(r.courseTensionN); }},
        {"MPa", false, [](R r) { return threeDigits(r.stressMpa); }},
        {"breaks at N", false, [](R r) { return threeDigits(r.breakingLoadN); }},
        {"share", false, [](R r) { return fixed(r.breakingShare, 2); }},
        {"usual", false, [](R r) { return fixed(r.workingShare, 2); }},
        {"semitones left", false, [](R r) { return fixed(r.semitonesToBreaking, 1); }},
        {"stretch mm", false, [](R r) { return threeDigits(r.stretchMm); }},
        {"B", false, [](R r) { return small(r.inharmonicity); }},
        {"kg/s", false, [](R r) { return threeDigits(r.impedanceKgS); }},
        {"alone Hz", false, [](R r) { return fixed(r.partialsHz.front(), 2); }},
        {"T60 s", false, [](R r) { return threeDigits(r.decayT60S.front()); }},
        {"on board", false, [](R r) { return threeDigits(r.boardT60S.front()); }},
        {"", true, [](R r) { return std::string(r.warnings.empty() ? "" : "!"); }},
    };
    return all;
}

} // namespace

std::string toCsv(const Schedule& schedule) {
    const auto line = [](const std::vector<std::string>& fields) {
        std::vector<std::string> quoted;
        for (const auto& field : fields)
            quoted.push_back(csvField(field));
        std::string out;
        for (std::size_t i = 0; i < quoted.size(); ++i)
            out += (i == 0 ? "" : ",") + quoted[i];
        return out + "\r\n";
    };
    std::vector<std::string> header;
    for (const auto& column : columns())
        if (auto* list = std::get_if<std::vector<double> ScheduleRow::*>(&column.member))
            for (std::size_t i = 1; i <= longest(schedule, *list); ++i)
                header.push_back(numbered(column.each, i));
        else
            header.push_back(column.key);
    std::string out = line(header);
    for (const auto& row : schedule.courses) {
        std::vector<std::string> fields;
        for (const auto& column : columns())
            std::visit(
                [&](auto member) {
                    const auto& value = row.*member;
                    using T = std::decay_t<decltype(value)>;
                    if constexpr (std::is_same_v<T, std::string>)
                        fields.push_back(value);
                    else if constexpr (std::is_same_v<T, int>)
                        fields.push_back(std::to_string(value));
                    else if constexpr (std::is_same_v<T, double>)
                        fields.push_back(document::numberText(value));
                    else if constexpr (std::is_same_v<T, std::vector<std::string>>)
                        fields.push_back(joined(value, "; "));
                    else
                        for (std::size_t i = 0; i < longest(schedule, member); ++i)
                            fields.push_back(i < value.size() ? document::numberText(value[i]) : "");
                },
                column.member);
        out += line(fields);
    }
    return out;
}

std::string toJson(const Schedule& schedule) {
    auto whole = juce::DynamicObject::Ptr(new juce::DynamicObject);
    whole->setProperty("instrument", utf8(schedule.instrument));
    juce::Array<juce::var> courses;
    for (const auto& row : schedule.courses) {
        auto object = juce::DynamicObject::Ptr(new juce::DynamicObject);
        for (const auto& column : columns())
            std::visit([&](auto member) { object->setProperty(column.key, toVar(row.*member)); }, column.member);
        courses.add(object.get());
    }
    whole->setProperty("courses", courses);
    whole->setProperty("total_tension_n", schedule.totalTensionN);
    auto bridges = juce::DynamicObject::Ptr(new juce::DynamicObject);
    for (const auto& [name, tension] : schedule.tensionByBridgeN)
        bridges->setProperty(utf8(name.empty() ? "unnamed" : name), tension);
    whole->setProperty("tension_by_bridge_n", bridges.get());
    whole->setProperty("warnings", toVar(schedule.warnings));
    return document::jsonText(whole.get()).toStdString();
}

std::string toTable(const Schedule& schedule) {
    std::string out = schedule.instrument.empty() ? "" : schedule.instrument + "\n\n";
    std::vector<std::vector<std::string>> cells;
    std::vector<bool> left;
    for (const auto& column : tableColumns()) {
        std::vector<std::string> cell{column.title};
        for (const auto& row : schedule.courses)
            cell.push_back(column.text(row));
        // A column without content, such as windings on a plain-strung instrument, only takes room.
        if (std::all_of(cell.begin() + 1, cell.end(), [](const auto& text) { return text.empty(); }))
            continue;
        cells.push_back(std::move(cell));
        left.push_back(column.left);
    }
    std::vector<std::size_t> widths;
    for (const auto& cell : cells) {
        std::size_t widest = 0;
        for (const auto& text : cell)
            widest = std::max(widest, width(text));
        widths.push_back(widest);
    }
    for (std::size_t r = 0; r <= schedule.courses.size(); ++r) {
        std::string line;
        for (std::size_t c = 0; c < cells.size(); ++c) {
            const std::string padding(widths[c] - width(cells[c][r]), ' ');
            line += (c == 0 ? "" : "  ") + (left[c] ? cells[c][r] + padding : padding + cells[c][r]);
        }
        line.erase(line.find_last_not_of(' ') + 1);
        out += line + "\n";
    }
    out += "\ntotal tension " + threeDigits(schedule.totalTensionN) + " N";
    if (schedule.tensionByBridgeN.size() > 1) {
        std::vector<std::string> parts;
        for (const auto& [name, tension] : schedule.tensionByBridgeN)
            parts.push_back(name + " " + threeDigits(tension) + " N");
        out += " (" + joined(parts, ", ") + ")";
    }
    out += "\n";
    bool first = true;
    const auto warn = [&](const std::string& text) {
        out += (first ? "\n! " : "! ") + text + "\n";
        first = false;
    };
    for (const auto& row : schedule.courses)
        for (const auto& warning : row.warnings)
            warn(row.note + ": " + warning);
    for (const auto& warning : schedule.warnings)
        warn(warning);
    return out;
}

} // namespace hitchpin::report
