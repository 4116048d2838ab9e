#include "Source/document/Document.h"

#include "Source/document/Field.h"
#include "Source/document/Rules.h"
#include "Source/document/WholeFile.h"

namespace hitchpin::document {

namespace {

constexpr const char* formatName = "hitchpin-instrument";
constexpr int formatVersion = 1;

Problems one(std::string message) { return {{"", std::move(message)}}; }

Result<Instrument, Problems> parseBytes(std::string_view text) {
    if (text.size() > largestFileBytes)
        return one("the file has " + std::to_string(text.size() >> 20) + " MiB: an instrument file has at most " +
                   std::to_string(largestFileBytes >> 20) + " MiB");
    if (auto wrong = whatIsWrongWithJson(text))
        return one(*wrong);
    auto whole = parseCheckedJson(text);
    auto* object = whole.getDynamicObject();
    if (object == nullptr)
        return one("an instrument file is an object, {…}");

    Reading reading;
    const auto expect = [&](const char* key, const juce::var& wanted, const std::string& orElse) {
        const auto value = object->getProperty(key);
        if (!object->hasProperty(key))
            reading.add(key, " is missing: must be " + jsonLine(wanted).toStdString());
        else if (!value.equalsWithSameType(wanted))
            reading.mustBe(key, value, "", jsonLine(wanted).toStdString() + orElse);
        object->removeProperty(key);
    };
    expect("format", formatName, "");
    expect("version", formatVersion, ", the version this program reads");
    if (!reading.problems.empty())
        return reading.problems; // another format's keys would all be unknown

    Instrument instrument;
    readRecord(reading, whole, "", instrument);
    auto problems = std::move(reading.problems);
    for (auto& problem : brokenRules(instrument))
        problems.push_back(std::move(problem));
    if (!problems.empty())
        return problems;
    return instrument;
}

} // namespace

Result<Instrument, Problems> parse(const juce::String& json) {
    return parseBytes({json.toRawUTF8(), json.getNumBytesAsUTF8()});
}

Result<Instrument, Problems> load(const juce::File& file) {
    if (file.isDirectory())
        return one("this is a directory, not an instrument file");
    if (!file.exists())
        return one("there is no such file");
    juce::FileInputStream stream(file);
    if (stream.failedToOpen())
        return one("the file cannot be opened: " + stream.getStatus().getErrorMessage().toStdString());
    juce::MemoryBlock bytes;
    // One byte over the limit is enough to know; a device or pipe has no size to ask for.
    stream.readIntoMemoryBlock(bytes, static_cast<ssize_t>(largestFileBytes + 1));
    if (stream.getStatus().failed())
        return one("the file cannot be read: " + stream.getStatus().getErrorMessage().toStdString());
    if (bytes.getSize() > largestFileBytes)
        return one("the file is over " + std::to_string(largestFileBytes >> 20) +
                   " MiB, more than an instrument file may have");
    return parseBytes({static_cast<const char*>(bytes.getData()), bytes.getSize()});
}

juce::String toJson(const Instrument& instrument) {
    auto whole = juce::DynamicObject::Ptr(new juce::DynamicObject);
    whole->setProperty("format", formatName);
    whole->setProperty("version", formatVersion);
    const auto content = writeRecord(instrument);
    for (const auto& [key, value] : content.getDynamicObject()->getProperties())
        whole->setProperty(key, value);
    return jsonText(whole.get());
}

juce::Result save(const Instrument& instrument, const juce::File& file) {
    return writeWhole(file, [&](juce::OutputStream& out) {
        const auto text = toJson(instrument);
        return out.write(text.toRawUTF8(), text.getNumBytesAsUTF8());
    });
}

} // namespace hitchpin::document
