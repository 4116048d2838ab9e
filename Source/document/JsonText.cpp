#include "Source/document/JsonText.h"

#include <algorithm>
#include <charconv>
#include <cmath>
#include <cstdlib>
#include <unordered_set>
#include <vector>

namespace hitchpin::document {

namespace {

struct Fault {
    std::size_t at;
    std::string message;
};

/// Length of the UTF-8 sequence at `text[at]` (RFC 3629: no overlong forms, surrogates or beyond U+10FFFF); 0 if
/// it is none.
std::size_t utf8Length(std::string_view text, std::size_t at) {
    const auto byte = [&](std::size_t i) {
        return at + i < text.size() ? static_cast<unsigned char>(text[at + i]) : 0u;
    };
    const auto follows = [&](std::size_t i, unsigned low = 0x80, unsigned high = 0xBF) {
        return byte(i) >= low && byte(i) <= high;
    };
    const unsigned first = byte(0);
    if (first < 0x80)
        return 1;
    if (first >= 0xC2 && first <= 0xDF)
        return follows(1) ? 2 : 0;
    if (first >= 0xE0 && first <= 0xEF) {
        const unsigned low = first == 0xE0 ? 0xA0 : 0x80;
        const unsigned high = first == 0xED ? 0x9F : 0xBF;
        return follows(1, low, high) && follows(2) ? 3 : 0;
    }
    if (first >= 0xF0 && first <= 0xF4) {
        const unsigned low = first == 0xF0 ? 0x90 : 0x80;
        const unsigned high = first == 0xF4 ? 0x8F : 0xBF;
        return follows(1, low, high) && follows(2) && follows(3) ? 4 : 0;
    }
    return 0;
}

/// Walks strict JSON with a stack of its own, so that no depth of brackets can exhaust the thread's.
class Checker {
public:
    explicit Checker(std::string_view text) : text_(text) {}

    std::optional<Fault> check() {
        try {
            walk();
        } catch (Fault& fault) {
            return std::move(fault);
        }
        return std::nullopt;
    }

private:
    struct Open {
        bool object;
        std::size_t at;
        std::unordered_set<std::string> keys;
    };

    [[noreturn]] void fail(std::size_t at, std::string message) const { throw Fault{at, std::move(message)}; }
    char peek() const { return at_ < text_.size() ? text_[at_] : '\0'; }
    bool atEnd() const { return at_ >= text_.size(); }

    void skipSpace() {
        while (peek() == ' ' || peek() == '\t' || peek() == '\n' || peek() == '\r')
            ++at_;
    }

    bool take(char wanted) {
        if (peek() != wanted)
            return false;
        ++at_;
        return true;
    }

    void walk() {
        skipSpace();
        if (atEnd())
            fail(at_, "the file is empty");
        for (bool valueFollows = true;;) {
            if (valueFollows) {
                skipSpace();
                valueFollows = value();
                continue;
            }
            skipSpace();
            if (open_.empty())
                break;
            if (take(',')) {
                skipSpace();
                if (open_.back().object)
                    key();
                else if (peek() == ']')
                    fail(at_, "a value must follow the comma");
                valueFollows = true;
            } else if (take(open_.back().object ? '}' : ']')) {
                open_.pop_back();
            } else {
                failInside(open_.back().object ? "',' or '}'" : "',' or ']'");
            }
        }
        if (!atEnd())
            fail(at_, "nothing may follow the closing bracket of the whole");
    }

    [[noreturn]] void failInside(const char* expected) const {
        if (atEnd())
            fail(at_, std::string("the file ends inside the ") + (open_.back().object ? "'{'" : "'['") + " of " +
                          place(open_.back().at));
        fail(at_, std::string("expected ") + expected + seen());
    }

    std::string seen() const {
        const auto c = static_cast<unsigned char>(peek());
        if (c < 0x20 || c == 0x7F)
            return ", found a control character";
        return ", found '" + std::string(text_.substr(at_, std::max<std::size_t>(1, utf8Length(text_, at_)))) + "'";
    }

    /// True where a value must follow: a bracket was opened that is not closed at once.
    bool value() {
        if (atEnd()) {
            if (open_.empty())
                fail(at_, "the file ends where a value is expected");
            failInside("a value");
        }
        const char c = peek();
        if (c == '{' || c == '[') {
            if (open_.size() >= static_cast<std::size_t>(deepestNesting))
                fail(at_, "brackets are nested more than " + std::to_string(deepestNesting) + " deep");
            open_.push_back({c == '{', at_, {}});
            ++at_;
            skipSpace();
            if (take(c == '{' ? '}' : ']')) {
                open_.pop_back();
                return false;
            }
            if (c == '{')
                key();
            return true;
        }
        if (open_.empty())
            fail(at_, "an instrument file begins with '{'" + seen());
        if (c == '"')
            string();
        else if (c == '-' || (c >= '0' && c <= '9'))
            number();
        else
            word();
        return false;
    }

    void key() {
        if (peek() != '"')
            failInside("a key in double quotes");
        const auto start = at_;
        auto name = string();
        if (name.empty())
            fail(start, "a key must not be empty");
        if (!open_.back().keys.insert(name).second)
            fail(start, "the key \"" + name + "\" stands twice in the same object");
        skipSpace();
        if (!take(':'))
            failInside("':'");
    }

    int hexDigits() {
        int code = 0;
        for (int i = 0; i < 4; ++i, ++at_) {
            const auto digit = juce::CharacterFunctions::getHexDigitValue(static_cast<juce::juce_wchar>(peek()));
            if (digit < 0)
                fail(at_, "\\u must be followed by four hexadecimal digits");
            code = code * 16 + digit;
        }
        return code;
    }

    /// The string's content with its escapes undone.
    std::string string() {
        const auto start = at_++;
        std::string content;
        for (;;) {
            if (atEnd())
                fail(start, "this string has no closing quote");
            const char c = peek();
            if (c == '"')
                break;
            if (static_cast<unsigned char>(c) < 0x20)
                fail(at_, "a control character must be escaped within a string");
            if (c != '\\') {
                const auto length = utf8Length(text_, at_);
                content += text_.substr(at_, length);
                at_ += length;
                continue;
            }
            ++at_;
            const char escaped = peek();
            ++at_;
            switch (escaped) {
            case '"':
            case '\\':
            case '/': content += escaped; break;
            case 'b': content += '\b'; break;
            case 'f': content += '\f'; break;
            case 'n': content += '\n'; break;
            case 'r': content += '\r'; break;
            case 't': content += '\t'; break;
            case 'u': appendEscaped(content); break;
            default: fail(at_ - 2, "this escape is not known in JSON");
            }
        }
        ++at_;
        return content;
    }

    void appendEscaped(std::string& content) {
        const auto start = at_ - 2;
        auto code = static_cast<juce::juce_wchar>(hexDigits());
        if (code == 0)
            fail(start, "\\u0000 cannot stand in a text");
        if (code >= 0xD800 && code <= 0xDFFF) {
            if (code > 0xDBFF || !take('\\') || !take('u'))
                fail(start, "half of a surrogate pair");
            const auto low = static_cast<juce::juce_wchar>(hexDigits());
            if (low < 0xDC00 || low > 0xDFFF)
                fail(start, "half of a surrogate pair");
            code = 0x10000 + ((code - 0xD800) << 10) + (low - 0xDC00);
        }
        content += juce::String::charToString(code).toStdString();
    }

    bool digits() {
        const auto start = at_;
        while (peek() >= '0' && peek() <= '9')
            ++at_;
        return at_ > start;
    }

    void number() {
        const auto start = at_;
        take('-');
        if (!take('0') && !digits())
            fail(start, "this is not a number");
        if (take('.') && !digits())
            fail(start, "digits must follow the decimal point");
        if (take('e') || take('E')) {
            if (!take('+'))
                take('-');
            if (!digits())
                fail(start, "digits must follow the exponent's sign");
        }
        const char c = peek();
        if (juce::CharacterFunctions::isLetterOrDigit(c) || c == '.' || c == '_')
            fail(start, "this is not a number");
        const std::string whole(text_.substr(start, at_ - start));
        double parsed = 0.0;
        const auto result = std::from_chars(whole.data(), whole.data() + whole.size(), parsed);
        // A magnitude too small for a double is a zero; one too large is a mistake.
        if (result.ec == std::errc::result_out_of_range && std::abs(std::strtod(whole.c_str(), nullptr)) > 1.0)
            fail(start, "this number is too large");
    }

    void word() {
        const auto start = at_;
        std::size_t end = at_;
        while (end < text_.size() && (juce::CharacterFunctions::isLetterOrDigit(text_[end]) || text_[end] == '_'))
            ++end;
        const auto found = text_.substr(start, end - start);
        if (found == "true" || found == "false" || found == "null") {
            at_ = end;
            return;
        }
        if (found.empty())
            failInside("a value");
        fail(start, std::string(found) + " is not a JSON value (texts stand in double quotes; NaN and infinity do "
                                         "not exist)");
    }

    std::string place(std::size_t at) const;

    std::string_view text_;
    std::size_t at_ = 0;
    std::vector<Open> open_;
};

std::string placeInText(std::string_view text, std::size_t at) {
    int line = 1;
    int column = 1;
    for (std::size_t i = 0; i < std::min(at, text.size()); ++i) {
        if (text[i] == '\n') {
            ++line;
            column = 1;
        } else if ((static_cast<unsigned char>(text[i]) & 0xC0) != 0x80) {
            ++column;
        }
    }
    return "line " + std::to_string(line) + ", column " + std::to_string(column);
}

std::string Checker::place(std::size_t at) const { return placeInText(text_, at); }

constexpr std::string_view byteOrderMark = "\xEF\xBB\xBF";

std::string_view withoutMark(std::string_view text) {
    return text.starts_with(byteOrderMark) ? text.substr(byteOrderMark.size()) : text;
}

} // namespace

std::optional<std::string> whatIsWrongWithJson(std::string_view text) {
    text = withoutMark(text);
    if (text.empty())
        return "the file is empty";
    for (std::size_t i = 0; i < text.size();) {
        const auto length = utf8Length(text, i);
        if (length == 0 || text[i] == '\0')
            return placeInText(text, i) + ": this is not text (UTF-8 is expected)";
        i += length;
    }
    if (auto fault = Checker(text).check())
        return placeInText(text, fault->at) + ": " + fault->message;
    return std::nullopt;
}

juce::var parseCheckedJson(std::string_view text) {
    text = withoutMark(text);
    // The parser reads each half of an escaped surrogate pair as a character of its own, and sums long whole
    // numbers in 64 bits: give it the character itself, and long numbers in a form it reads as a double.
    std::string plain;
    plain.reserve(text.size());
    bool inString = false;
    for (std::size_t i = 0; i < text.size(); ++i) {
        const char c = text[i];
        if (inString && c == '\\') {
            if (text[i + 1] == 'u') {
                const auto unit = [&](std::size_t at) {
                    return static_cast<juce::juce_wchar>(std::stoul(std::string(text.substr(at, 4)), nullptr, 16));
                };
                auto code = unit(i + 2);
                if (code >= 0xD800 && code <= 0xDBFF) {
                    code = 0x10000 + ((code - 0xD800) << 10) + (unit(i + 8) - 0xDC00);
                    plain += juce::String::charToString(code).toStdString();
                    i += 11;
                    continue;
                }
            }
            plain += c;
            plain += text[++i];
            continue;
        }
        if (c == '"')
            inString = !inString;
        if (!inString && (c == '-' || (c >= '0' && c <= '9'))) {
            const auto end = std::min(text.find_first_not_of("+-.eE0123456789", i), text.size());
            std::string number(text.substr(i, end - i));
            if (number.size() > 15) {
                char buffer[40];
                const double value = std::strtod(number.c_str(), nullptr);
                number.assign(buffer, std::to_chars(buffer, buffer + sizeof(buffer), value, std::chars_format::scientific).ptr);
            }
            plain += number;
            i = end - 1;
            continue;
        }
        plain += c;
    }
    juce::var parsed;
    const auto result = juce::JSON::parse(juce::String::fromUTF8(plain.data(), static_cast<int>(plain.size())), parsed);
    jassert(result.wasOk());
    juce::ignoreUnused(result);
    return parsed;
}

std::string numberText(double value) {
    char buffer[40];
    const auto end = std::to_chars(buffer, buffer + sizeof(buffer), value == 0.0 ? 0.0 : value).ptr;
    return std::string(buffer, end);
}

namespace {

std::string quoted(const juce::String& text) {
    std::string out = "\"";
    for (const char c : text.toStdString()) {
        switch (c) {
        case '"': out += "\\\""; break;
        case '\\': out += "\\\\"; break;
        case '\n': out += "\\n"; break;
        case '\r': out += "\\r"; break;
        case '\t': out += "\\t"; break;
        default:
            if (static_cast<unsigned char>(c) < 0x20) {
                char escape[8];
                std::snprintf(escape, sizeof(escape), "\\u%04x", static_cast<unsigned>(c));
                out += escape;
            } else {
                out += c;
            }
        }
    }
    return out + "\"";
}

std::string onOneLine(const juce::var& value) {
    if (value.isString())
        return quoted(value.toString());
    if (value.isBool())
        return static_cast<bool>(value) ? "true" : "false";
    if (value.isDouble())
        return std::isfinite(static_cast<double>(value)) ? numberText(value) : "null";
    if (value.isInt() || value.isInt64())
        return std::to_string(static_cast<juce::int64>(value));
    std::string out;
    if (const auto* list = value.getArray()) {
        for (const auto& item : *list)
            out += (out.empty() ? "" : ", ") + onOneLine(item);
        return "[" + out + "]";
    }
    if (const auto* object = value.getDynamicObject()) {
        for (const auto& [key, item] : const_cast<juce::DynamicObject*>(object)->getProperties())
            out += (out.empty() ? "" : ", ") + quoted(key.toString()) + ": " + onOneLine(item);
        return out.empty() ? "{}" : "{ " + out + " }";
    }
    return "null";
}

constexpr std::size_t widestLine = 100;

void writeIndented(const juce::var& value, std::size_t indent, std::string& out) {
    auto line = onOneLine(value);
    const bool whole = indent == 0; // the file itself is never squeezed into a line
    if ((!whole && line.size() + indent <= widestLine) || !(value.isArray() || value.isObject())) {
        out += line;
        return;
    }
    const std::string inner(indent + 2, ' ');
    bool first = true;
    const auto begin = [&] {
        out += first ? "\n" : ",\n";
        out += inner;
        first = false;
    };
    if (const auto* list = value.getArray()) {
        out += "[";
        for (const auto& item : *list) {
            begin();
            writeIndented(item, indent + 2, out);
        }
        out += "\n" + std::string(indent, ' ') + "]";
    } else if (auto* object = value.getDynamicObject()) {
        out += "{";
        for (const auto& [key, item] : object->getProperties()) {
            begin();
            out += quoted(key.toString()) + ": ";
            writeIndented(item, indent + 2, out);
        }
        out += "\n" + std::string(indent, ' ') + "}";
    }
}

} // namespace

juce::String jsonText(const juce::var& value) {
    std::string out;
    writeIndented(value, 0, out);
    out += "\n";
    return juce::String::fromUTF8(out.data(), static_cast<int>(out.size()));
}

juce::String jsonLine(const juce::var& value) {
    const auto out = onOneLine(value);
    return juce::String::fromUTF8(out.data(), static_cast<int>(out.size()));
}

} // namespace hitchpin::document
