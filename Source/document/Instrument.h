// The instrument file's content in workshop units.
#pragma once

#include <string>

namespace hitchpin::document {

struct Instrument {
    std::string name;
    std::string remarks;
    bool operator==(const Instrument&) const = default;
};

} // namespace hitchpin::document
