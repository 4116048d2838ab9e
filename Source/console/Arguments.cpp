#include "Source/console/Command.h"

#include <algorithm>
#include <charconv>
#include <cmath>

namespace hitchpin::console {

namespace {

std::string plain(double value) {
    char text[32];
    const auto end = std::to_chars(text, text + sizeof text, value).ptr;
    return {text, end};
}

} // namespace

Result<Arguments> Arguments::read(const std::vector<std::string>& words, const std::vector<Option>& options,
                                  bool takesFile) {
    Arguments arguments;
    bool onlyFiles = false, fileGiven = false;
    for (std::size_t i = 0; i < words.size(); ++i) {
        const auto& word = words[i];
        if (!onlyFiles && word == "--") {
            onlyFiles = true;
            continue;
        }
        if (onlyFiles || word.empty() || word[0] != '-' || word == "-") {
            if (!takesFile)
                return Failure{"\"" + word + "\" is not expected"};
            if (fileGiven)
                return Failure{"one instrument file at a time: \"" + arguments.file_ + "\" or \"" + word + "\""};
            arguments.file_ = word;
            fileGiven = true;
            continue;
        }
        const auto option = std::find_if(options.begin(), options.end(), [&](const auto& o) { return o.name == word; });
        if (option == options.end())
            return Failure{word + " is not an option here"};
        if (arguments.has(word))
            return Failure{word + " is given twice"};
        if (option->value.empty()) {
            arguments.values_[word] = "";
        } else if (i + 1 == words.size()) {
            return Failure{word + " needs a value: " + word + " " + option->value};
        } else {
            arguments.values_[word] = words[++i];
        }
    }
    if (takesFile && !fileGiven)
        return Failure{"an instrument file is needed"};
    return arguments;
}

std::optional<std::string> Arguments::text(const std::string& option) const {
    const auto found = values_.find(option);
    return found == values_.end() ? std::nullopt : std::optional(found->second);
}

Result<double> Arguments::number(const std::string& option, double orElse, double low, double high,
                                 const std::string& unit) const {
    const auto given = text(option);
    if (!given)
        return orElse;
    double value = 0.0;
    const auto [end, failure] = std::from_chars(given->data(), given->data() + given->size(), value);
    const auto must = ": must be from " + plain(low) + " to " + plain(high) + (unit.empty() ? "" : " " + unit);
    if (failure != std::errc{} || end != given->data() + given->size() || !std::isfinite(value))
        return Failure{option + " = " + *given + must};
    if (value < low || value > high)
        return Failure{option + " = " + *given + (unit.empty() ? "" : " " + unit) + must};
    return value;
}

} // namespace hitchpin::console
