// The hitchpin program. Data goes to stdout, messages to stderr.
#include "Source/console/Command.h"

#include <cstdio>
#include <iostream>

namespace hitchpin::console {

namespace {

const std::vector<const Command*>& commands() {
    static const std::vector<const Command*> all{&scheduleCommand(), &soundCommand(), &partialsCommand(),
                                                 &checkCommand(), &keysCommand()};
    return all;
}

std::string helpOf(const Command& command) {
    std::string text = "hitchpin " + command.name + " " + command.usage + "\n  " + command.summary + "\n";
    for (const auto& option : command.options) {
        auto left = option.name + (option.value.empty() ? "" : " " + option.value);
        left.resize(std::max<std::size_t>(left.size(), 22), ' ');
        text += "    " + left + " " + option.help + "\n";
    }
    return text;
}

std::string helpOfAll() {
    std::string text = "Hitchpin: strings from caliper to ear. FILE is an instrument file.\n\n";
    for (const Command* command : commands())
        text += helpOf(*command) + "\n";
    return text + "hitchpin --help, hitchpin COMMAND --help, hitchpin --version\n"
                  "Ends with 0 when all went well, 1 when the work failed, 2 when called wrongly.\n";
}

Exit call(const std::vector<std::string>& words) {
    if (words.empty()) {
        std::cerr << helpOfAll();
        return calledWrongly;
    }
    if (words[0] == "--help" || words[0] == "help") {
        std::cout << helpOfAll();
        return well;
    }
    if (words[0] == "--version") {
        std::cout << "hitchpin " << HITCHPIN_VERSION << "\n";
        return well;
    }
    for (const Command* command : commands()) {
        if (command->name != words[0])
            continue;
        const std::vector<std::string> rest(words.begin() + 1, words.end());
        for (const auto& word : rest)
            if (word == "--help") {
                std::cout << helpOf(*command);
                return well;
            }
        const auto arguments = Arguments::read(rest, command->options, command->takesFile);
        if (!arguments)
            return wrongCall(*command, arguments.error().message);
        return command->run(*arguments);
    }
    say("\"" + words[0] + "\" is not a command: must be schedule, sound, partials, check or keys (hitchpin --help)");
    return calledWrongly;
}

} // namespace

void say(const std::string& message) { std::cerr << "hitchpin: " << message << std::endl; }

Exit wrongCall(const Command& command, const std::string& why) {
    say(command.name + ": " + why);
    std::cerr << "usage: hitchpin " << command.name << " " << command.usage << std::endl;
    return calledWrongly;
}

} // namespace hitchpin::console

int main(int count, char** words) {
    const auto end = hitchpin::console::call({words + 1, words + count});
    std::cout.flush();
    if (!std::cout && end == hitchpin::console::well) {
        hitchpin::console::say("the output could not be written whole");
        return hitchpin::console::failed;
    }
    return end;
}
