// How each type of value is read, written and put in words. Included by the field table alone.
#pragma once

#include "Source/document/Field.h"

#include <algorithm>
#include <utility>

namespace hitchpin::document {

template <class T>
struct IsOptional : std::false_type {};
template <class T>
struct IsOptional<std::optional<T>> : std::true_type {};
template <class T>
struct IsList : std::false_type {};
template <class T>
struct IsList<std::vector<T>> : std::true_type {};
template <class T>
struct IsNamed : std::false_type {};
template <class T>
struct IsNamed<Named<T>> : std::true_type {};
template <class T>
struct IsArray : std::false_type {};
template <class T, std::size_t N>
struct IsArray<std::array<T, N>> : std::true_type {};
template <class T>
concept Record = requires(T record) { record.given; };

template <class T>
std::string inWords(const Allowed& allowed) {
    if constexpr (std::is_same_v<T, bool>) {
        return "true or false";
    } else if constexpr (std::is_same_v<T, int>) {
        return "a whole number " + allowed.range.inWords(allowed.unit);
    } else if constexpr (std::is_same_v<T, double>) {
        return "a number " + allowed.range.inWords(allowed.unit);
    } else if constexpr (std::is_same_v<T, std::string>) {
        return "a text";
    } else if constexpr (std::is_enum_v<T>) {
        std::string list;
        const auto& all = names<T>();
        for (std::size_t i = 0; i < all.size(); ++i)
            list += (i == 0 ? "" : i + 1 == all.size() ? " or " : ", ") + ("\"" + all[i] + "\"");
        return list;
    } else if constexpr (IsOptional<T>::value) {
        return inWords<typename T::value_type>(allowed);
    } else if constexpr (IsNamed<T>::value) {
        return "an object of names";
    } else if constexpr (IsArray<T>::value) {
        if (allowed.second)
            return "a pair [" + inWords<double>(allowed) + ", a number " +
                   allowed.second->range.inWords(allowed.second->unit) + "]";
        return "a list of " + std::to_string(std::tuple_size_v<T>) + " numbers " + allowed.range.inWords(allowed.unit);
    } else if constexpr (IsList<T>::value) {
        if constexpr (Record<typename T::value_type>)
            return "a list of objects";
        else
            return "a list, each " + inWords<typename T::value_type>(allowed);
    } else {
        return "an object";
    }
}

inline bool isNumber(const juce::var& value) { return value.isDouble() || value.isInt() || value.isInt64(); }

template <class T>
void readValue(Reading& reading, const juce::var& value, const std::string& path, T& to, const Allowed& allowed) {
    const auto wrong = [&] { reading.mustBe(path, value, allowed.unit, inWords<T>(allowed)); };
    if constexpr (std::is_same_v<T, bool>) {
        value.isBool() ? void(to = value) : wrong();
    } else if constexpr (std::is_same_v<T, int> || std::is_same_v<T, double>) {
        if (!isNumber(value))
            return wrong();
        const double number = value;
        if (std::is_same_v<T, int> && number != std::floor(number))
            return wrong();
        if (!allowed.range.holds(number))
            return reading.mustBe(path, value, allowed.unit, allowed.range.inWords(allowed.unit));
        to = static_cast<T>(number);
    } else if constexpr (std::is_same_v<T, std::string>) {
        value.isString() ? void(to = value.toString().toStdString()) : wrong();
    } else if constexpr (std::is_enum_v<T>) {
        const auto& all = names<T>();
        const auto found = std::find(all.begin(), all.end(), value.toString().toStdString());
        value.isString() && found != all.end() ? void(to = static_cast<T>(found - all.begin())) : wrong();
    } else if constexpr (IsOptional<T>::value) {
        typename T::value_type content{};
        readValue(reading, value, path, content, allowed);
        to = std::move(content);
    } else if constexpr (IsNamed<T>::value) {
        auto* object = value.getDynamicObject();
        if (object == nullptr)
            return wrong();
        for (const auto& [key, item] : object->getProperties()) {
            to.emplace_back(key.toString().toStdString(), typename T::value_type::second_type{});
            readValue(reading, item, path + "[" + jsonLine(key.toString()).toStdString() + "]", to.back().second,
                      allowed);
        }
    } else if constexpr (IsArray<T>::value) {
        const auto* list = value.getArray();
        if (list == nullptr || static_cast<std::size_t>(list->size()) != to.size())
            return wrong();
        for (std::size_t i = 0; i < to.size(); ++i) {
            auto one = allowed;
            if (i == 1 && allowed.second)
                one.unit = allowed.second->unit, one.range = allowed.second->range;
            readValue(reading, (*list)[static_cast<int>(i)], path + "[" + std::to_string(i) + "]", to[i], one);
        }
    } else if constexpr (IsList<T>::value) {
        const auto* list = value.getArray();
        if (list == nullptr)
            return wrong();
        const auto count = static_cast<std::size_t>(list->size());
        if (count < allowed.fewest || count > allowed.most)
            return reading.add(path, " has " + std::to_string(count) + (count == 1 ? " entry" : " entries") + ": must be from " +
                                         std::to_string(allowed.fewest) + " to " + std::to_string(allowed.most));
        to.resize(count);
        // What stands in a list is whole, but for the entries of `each`.
        const bool partly = std::exchange(reading.partly, allowed.partly);
        for (std::size_t i = 0; i < count; ++i)
            readValue(reading, (*list)[static_cast<int>(i)], path + "[" + std::to_string(i) + "]", to[i], allowed);
        reading.partly = partly;
    } else {
        readRecord(reading, value, path, to);
    }
}

template <class T>
juce::var writeValue(const T& value) {
    if constexpr (std::is_same_v<T, bool> || std::is_same_v<T, int>) {
        return value;
    } else if constexpr (std::is_same_v<T, double>) {
        // Whole numbers are written without a point.
        return value == std::floor(value) && std::abs(value) < 1e9 ? juce::var(static_cast<int>(value)) : juce::var(value);
    } else if constexpr (std::is_same_v<T, std::string>) {
        return juce::String::fromUTF8(value.data(), static_cast<int>(value.size()));
    } else if constexpr (std::is_enum_v<T>) {
        return juce::String(names<T>()[static_cast<std::size_t>(value)]);
    } else if constexpr (IsOptional<T>::value) {
        return value ? writeValue(*value) : juce::var();
    } else if constexpr (IsNamed<T>::value) {
        auto object = juce::DynamicObject::Ptr(new juce::DynamicObject);
        for (const auto& [key, item] : value)
            object->setProperty(juce::String::fromUTF8(key.data(), static_cast<int>(key.size())), writeValue(item));
        return object.get();
    } else if constexpr (IsArray<T>::value || IsList<T>::value) {
        juce::Array<juce::var> list;
        for (const auto& item : value)
            list.add(writeValue(item));
        return list;
    } else {
        return writeRecord(value);
    }
}

/// The innermost record type within a member's type, for the reference; "" where there is none.
template <class T>
std::string recordTypeOf() {
    if constexpr (Record<T>)
        return typeid(T).name();
    else if constexpr (IsNamed<T>::value)
        return recordTypeOf<typename T::value_type::second_type>();
    else if constexpr (IsList<T>::value)
        return recordTypeOf<typename T::value_type>();
    else
        return {};
}

template <class R, class T>
Field<R> field(std::string key, T R::*member, Allowed allowed, std::string doc) {
    Field<R> row;
    row.key = std::move(key);
    row.doc = std::move(doc);
    row.allowed = inWords<T>(allowed);
    row.recordType = recordTypeOf<T>();
    row.read = [member, allowed](Reading& reading, const juce::var& value, const std::string& path, R& record) {
        readValue(reading, value, path, record.*member, allowed);
    };
    row.write = [member](const R& record) { return writeValue(record.*member); };
    row.same = [member](const R& a, const R& b) { return a.*member == b.*member; };
    // A record within `each` says only what differs; anything else replaces.
    row.copy = [member](R& to, const R& source) {
        if constexpr (Record<T>)
            to.*member = overlaid(to.*member, source.*member);
        else
            to.*member = source.*member;
    };
    return row;
}

} // namespace hitchpin::document
