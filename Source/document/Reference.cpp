#include "Source/document/Reference.h"

#include "Source/document/Field.h"

namespace hitchpin::document {

namespace {

/// The default in words, or as it would stand in the file.
template <class R>
std::string defaultOf(const Field<R>& field) {
    static const R neutral{};
    if (!field.absent.empty())
        return field.absent;
    const auto value = field.write(neutral);
    return value.isVoid() ? "none" : jsonLine(value).toStdString();
}

template <class R>
void list(std::vector<std::string>& lines) {
    lines.push_back(table<R>().name + ":");
    for (const auto& field : table<R>().fields)
        lines.push_back("  " + field.key + ": " + field.allowed +
                        (field.required ? "; required" : "; default " + defaultOf(field)) + ". " + field.doc);
}

template <class R>
using Records = std::vector<const R*>;

template <class R>
void leftOut(std::vector<std::string>& lines, const Records<R>& records, const std::string& path) {
    const auto& fields = table<R>().fields;
    for (std::size_t i = 0; i < fields.size(); ++i) {
        // Records within are listed by their own keys.
        if (fields[i].required || (!fields[i].recordType.empty() && defaultOf(fields[i]) == "{}"))
            continue;
        std::size_t count = 0;
        for (const R* record : records)
            count += isSaid(*record, i) ? 0 : 1;
        if (count == 0)
            continue;
        const auto of = records.size() > 1 ? " (" + std::to_string(count) + " of " + std::to_string(records.size()) + ")"
                                           : std::string();
        lines.push_back(path + fields[i].key + " = " + defaultOf(fields[i]) + of);
    }
}

template <class R, class T>
Records<T> within(const Records<R>& records, T R::*member) {
    Records<T> all;
    for (const R* record : records)
        all.push_back(&(record->*member));
    return all;
}

template <class R, class T>
Records<T> within(const Records<R>& records, std::vector<T> R::*member) {
    Records<T> all;
    for (const R* record : records)
        for (const T& one : record->*member)
            all.push_back(&one);
    return all;
}

} // namespace

std::vector<std::string> keyReference() {
    std::vector<std::string> lines;
    list<Instrument>(lines);
    list<Tuning>(lines);
    list<Climate>(lines);
    list<Material>(lines);
    list<Bridge>(lines);
    list<BoardMode>(lines);
    list<Course>(lines);
    list<Core>(lines);
    list<Winding>(lines);
    list<Ends>(lines);
    list<Beyond>(lines);
    list<Plan>(lines);
    list<Playing>(lines);
    list<Hammer>(lines);
    list<TangentMeasures>(lines);
    list<BowMeasures>(lines);
    return lines;
}

std::vector<std::string> defaultsTaken(const Instrument& instrument) {
    std::vector<std::string> lines;
    const Records<Instrument> whole{&instrument};
    leftOut(lines, whole, "");
    leftOut(lines, within(whole, &Instrument::tuning), "tuning.");
    leftOut(lines, within(whole, &Instrument::climate), "climate.");
    Records<Material> materials;
    for (const auto& [name, material] : instrument.materials)
        materials.push_back(&material);
    leftOut(lines, materials, "materials.*.");
    const auto bridges = within(whole, &Instrument::bridges);
    leftOut(lines, bridges, "bridges[].");
    leftOut(lines, within(bridges, &Bridge::modes), "bridges[].modes[].");
    const auto courses = within(whole, &Instrument::courses);
    leftOut(lines, courses, "courses[].");
    leftOut(lines, within(courses, &Course::core), "courses[].core.");
    leftOut(lines, within(courses, &Course::windings), "courses[].windings[].");
    leftOut(lines, within(courses, &Course::ends), "courses[].ends.");
    const auto playing = within(whole, &Instrument::playing);
    leftOut(lines, playing, "playing.");
    return lines;
}

} // namespace hitchpin::document
