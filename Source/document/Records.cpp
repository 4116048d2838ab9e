// Reading and writing records by their field tables.
#include "Source/document/Field.h"

#include <algorithm>
#include <numeric>

namespace hitchpin::document {

namespace {

/// Edits that turn one word into the other (Levenshtein 1966).
std::size_t distance(const std::string& a, const std::string& b) {
    std::vector<std::size_t> row(b.size() + 1);
    std::iota(row.begin(), row.end(), std::size_t{0});
    for (std::size_t i = 1; i <= a.size(); ++i) {
        auto diagonal = std::exchange(row[0], i);
        for (std::size_t j = 1; j <= b.size(); ++j) {
            const auto replaced = diagonal + (a[i - 1] == b[j - 1] ? 0 : 1);
            diagonal = std::exchange(row[j], std::min({row[j] + 1, row[j - 1] + 1, replaced}));
        }
    }
    return row.back();
}

std::string within(const std::string& path, const std::string& key) { return path.empty() ? key : path + "." + key; }

/// A stranger's text may be long or odd: enough of it to be recognised.
std::string shortened(const juce::var& value) {
    const auto text = jsonLine(value);
    return (text.length() > 60 ? text.substring(0, 60) + "…" : text).toStdString();
}

} // namespace

void Reading::mustBe(const std::string& path, const juce::var& value, const std::string& unit,
                     const std::string& what) {
    const bool number = value.isDouble() || value.isInt() || value.isInt64();
    add(path, " = " + shortened(value) + (number && !unit.empty() ? " " + unit : "") + ": must be " + what);
}

template <class R>
void readRecord(Reading& reading, const juce::var& value, const std::string& path, R& record) {
    auto* object = value.getDynamicObject();
    if (object == nullptr)
        return reading.mustBe(path, value, "", "an object");
    const auto& fields = table<R>().fields;
    const bool partly = reading.partly;
    const auto allowedHere = [&](const Field<R>& field) { return !(partly && field.wholeCourse); };
    for (const auto& [name, item] : object->getProperties()) {
        const auto key = name.toString().toStdString();
        const auto row = std::find_if(fields.begin(), fields.end(), [&](const auto& f) { return f.key == key; });
        if (row == fields.end()) {
            const Field<R>* nearest = nullptr;
            auto shortest = std::max<std::size_t>(2, key.size() / 3) + 1;
            for (const auto& field : fields) {
                const auto d = distance(field.key, key);
                if (allowedHere(field) && d < shortest)
                    nearest = &field, shortest = d;
            }
            reading.add(within(path, key), " is not a known key" +
                                               (nearest != nullptr ? ": did you mean " + nearest->key + "?"
                                                                   : " of " + table<R>().name));
            continue;
        }
        if (!allowedHere(*row)) {
            reading.add(within(path, key), " cannot differ from string to string: it belongs to the course");
            continue;
        }
        record.given.add(static_cast<std::size_t>(row - fields.begin()));
        row->read(reading, item, within(path, key), record);
    }
    if (!partly)
        for (std::size_t i = 0; i < fields.size(); ++i)
            if (fields[i].required && !record.given.has(i))
                reading.add(within(path, fields[i].key), " is missing: must be " + fields[i].allowed);
}

template <class R>
juce::var writeRecord(const R& record) {
    auto object = juce::DynamicObject::Ptr(new juce::DynamicObject);
    const auto& fields = table<R>().fields;
    for (std::size_t i = 0; i < fields.size(); ++i)
        if (isSaid(record, i))
            if (auto value = fields[i].write(record); !value.isVoid())
                object->setProperty(juce::String(fields[i].key), value);
    return object.get();
}

#define HITCHPIN_RECORD(R)                                                                                             \
    template void readRecord<R>(Reading&, const juce::var&, const std::string&, R&);                                   \
    template juce::var writeRecord<R>(const R&);
HITCHPIN_RECORD(Tuning)
HITCHPIN_RECORD(Climate)
HITCHPIN_RECORD(Material)
HITCHPIN_RECORD(Core)
HITCHPIN_RECORD(Winding)
HITCHPIN_RECORD(Ends)
HITCHPIN_RECORD(Beyond)
HITCHPIN_RECORD(Plan)
HITCHPIN_RECORD(BoardMode)
HITCHPIN_RECORD(Bridge)
HITCHPIN_RECORD(Course)
HITCHPIN_RECORD(Hammer)
HITCHPIN_RECORD(TangentMeasures)
HITCHPIN_RECORD(BowMeasures)
HITCHPIN_RECORD(Playing)
HITCHPIN_RECORD(Instrument)
#undef HITCHPIN_RECORD

bool Course::operator==(const Course&) const = default;

} // namespace hitchpin::document
