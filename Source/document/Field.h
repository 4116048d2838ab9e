// The field table: one row a key, from which reading, checking, writing, messages and the printed reference derive.
#pragma once

#include "Source/document/Document.h"
#include "Source/document/JsonText.h"

#include <cmath>
#include <functional>
#include <limits>
#include <type_traits>

namespace hitchpin::document {

/// What a number may be.
struct Range {
    double low = -std::numeric_limits<double>::infinity();
    double high = std::numeric_limits<double>::infinity();
    bool lowAllowed = true;

    bool holds(double x) const { return (lowAllowed ? x >= low : x > low) && x <= high; }
    std::string inWords(const std::string& unit) const {
        const auto end = unit.empty() ? std::string() : " " + unit;
        if (lowAllowed)
            return "from " + numberText(low) + " to " + numberText(high) + end;
        return "over " + numberText(low) + " and at most " + numberText(high) + end;
    }
};
inline Range from(double low, double high) { return {low, high, true}; }
inline Range over(double low, double high) { return {low, high, false}; }

/// What a value may be, and how it is spoken of.
struct Allowed {
    std::string unit;
    Range range;
    std::size_t fewest = 0; ///< of a list
    std::size_t most = 100000;
    struct Second {
        std::string unit;
        Range range;
    };
    std::optional<Second> second = {}; ///< of a pair of different things
    bool partly = false;               ///< of a list whose entries say only what differs
};

/// Gathers all problems of one reading.
struct Reading {
    Problems problems;
    bool partly = false; ///< inside `each`: nothing is required there

    void add(const std::string& path, const std::string& rest) { problems.push_back({path, path + rest}); }
    /// "path = value: must be …"
    void mustBe(const std::string& path, const juce::var& value, const std::string& unit, const std::string& what);
};

/// Names of an enumeration's values in the file, in the order of the values.
template <class E>
const std::vector<std::string>& names();

/// One row. `R` is the record that holds the member.
template <class R>
struct Field {
    std::string key;
    std::string doc;
    bool required = false;
    bool wholeCourse = false; ///< cannot differ from string to string
    std::string allowed;      ///< in words: "a number over 0 and at most 10000 mm"
    std::string absent;       ///< in words, where no value stands for "not given"
    std::function<void(Reading&, const juce::var&, const std::string& path, R&)> read;
    std::function<juce::var(const R&)> write; ///< void where there is nothing to write
    std::function<bool(const R&, const R&)> same;
    std::function<void(R& to, const R& from)> copy;
    std::string recordType; ///< of records: the name under which the reference lists their keys

    Field& require() { return required = true, *this; }
    Field& ofWholeCourse() { return wholeCourse = true, *this; }
    Field& ifAbsent(std::string words) { return absent = std::move(words), *this; }
};

template <class R>
struct Table {
    std::string name; ///< "course"
    std::vector<Field<R>> fields;
};

/// The table of a record type, made on first use.
template <class R>
const Table<R>& table();

template <class R>
void readRecord(Reading&, const juce::var&, const std::string& path, R&);
template <class R>
juce::var writeRecord(const R&);

/// `base` with everything that `top` says differently.
template <class R>
R overlaid(R base, const R& top) {
    static const R neutral{};
    const auto& fields = table<R>().fields;
    for (std::size_t i = 0; i < fields.size(); ++i)
        if (top.given.has(i) || !fields[i].same(top, neutral))
            fields[i].copy(base, top);
    return base;
}

/// True where the file gave the key or a value differs from the default.
template <class R>
bool isSaid(const R& record, std::size_t field) {
    static const R neutral{};
    return record.given.has(field) || !table<R>().fields[field].same(record, neutral);
}

} // namespace hitchpin::document
