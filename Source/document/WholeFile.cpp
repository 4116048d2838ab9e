#include "Source/document/WholeFile.h"

#include <algorithm>
#include <sys/stat.h>

namespace hitchpin::document {

namespace {

juce::Result failed(const juce::File& file, const juce::String& why) {
    return juce::Result::fail("cannot write " + file.getFullPathName() + ": " + why);
}

/// Something that exists and is neither a plain file nor a directory: to rename over it would destroy it.
bool isDevice(const juce::File& file) {
    struct stat status {};
    return ::stat(file.getFullPathName().toRawUTF8(), &status) == 0 && !S_ISREG(status.st_mode) &&
           !S_ISDIR(status.st_mode);
}

/// A file stream that knows how far it was written: a disk that takes only a part of a block gives no error.
class Measured final : public juce::OutputStream {
public:
    explicit Measured(juce::OutputStream& stream) : stream_(stream) {}
    void flush() override { stream_.flush(); }
    bool setPosition(juce::int64 position) override { return stream_.setPosition(position); }
    juce::int64 getPosition() override { return stream_.getPosition(); }
    bool write(const void* data, std::size_t size) override {
        end_ = std::max(end_, stream_.getPosition() + static_cast<juce::int64>(size));
        return stream_.write(data, size);
    }
    juce::int64 end() const noexcept { return end_; }

private:
    juce::OutputStream& stream_;
    juce::int64 end_ = 0;
};

/// Empty when all went well.
juce::String written(const juce::File& file, const std::function<bool(juce::OutputStream&)>& write) {
    juce::FileOutputStream out(file);
    if (out.failedToOpen())
        return out.getStatus().getErrorMessage();
    Measured measured(out);
    const bool well = write(measured);
    out.flush(); // to the disk: a full one shows here at the latest
    if (out.getStatus().failed())
        return out.getStatus().getErrorMessage();
    if (!isDevice(file) && file.getSize() < measured.end())
        return "only " + juce::String(file.getSize()) + " of " + juce::String(measured.end()) + " bytes could be written";
    return well ? juce::String() : juce::String("the work was not finished");
}

} // namespace

juce::Result writeWhole(const juce::File& named, const std::function<bool(juce::OutputStream&)>& write) {
    const auto file = named.getLinkedTarget(); // a link stays a link
    if (file.isDirectory())
        return failed(file, "it is a directory");
    if (!file.getParentDirectory().isDirectory())
        return failed(file, "there is no directory " + file.getParentDirectory().getFullPathName());
    if (isDevice(file)) {
        const auto why = written(file, write);
        return why.isEmpty() ? juce::Result::ok() : failed(file, why);
    }
    juce::TemporaryFile beside(file); // deletes itself when not moved
    const auto why = written(beside.getFile(), write);
    if (why.isNotEmpty())
        return failed(file, why);
    if (!beside.overwriteTargetFileWithTemporary())
        return failed(file, "it cannot be replaced");
    return juce::Result::ok();
}

} // namespace hitchpin::document
