// What the hitchpin program can do: one file a command, one table of options each.
#pragma once

#include "dsp/base/Result.h"

#include <map>
#include <optional>
#include <string>
#include <vector>

namespace hitchpin::console {

/// What a call ends with: the exit code of the program.
enum Exit { well = 0, failed = 1, calledWrongly = 2 };

struct Option {
    std::string name;  ///< "--rate"
    std::string value; ///< what it takes, in words for the help: "HZ"; empty for a flag
    std::string help;
};

/// The words of one call after the command's name, checked against its options.
class Arguments {
public:
    static Result<Arguments> read(const std::vector<std::string>& words, const std::vector<Option>&, bool takesFile);

    const std::string& file() const noexcept { return file_; }
    bool has(const std::string& option) const { return values_.contains(option); }
    std::optional<std::string> text(const std::string& option) const;
    /// Fails with option, value, unit and range.
    Result<double> number(const std::string& option, double orElse, double low, double high,
                          const std::string& unit) const;

private:
    std::string file_;
    std::map<std::string, std::string> values_;
};

struct Command {
    std::string name;
    std::string usage;   ///< after the program's name
    std::string summary; ///< one line
    std::vector<Option> options;
    bool takesFile = true;
    Exit (*run)(const Arguments&);
};

const Command& scheduleCommand();
const Command& soundCommand();
const Command& partialsCommand();
const Command& checkCommand();
const Command& keysCommand();

/// A message on stderr.
void say(const std::string& message);
/// Says what is wrong with a call and how it is meant.
Exit wrongCall(const Command&, const std::string& why);

} // namespace hitchpin::console
