#include "Source/plugin/Presets.h"

#include <PresetData.h>

#include <algorithm>

namespace hitchpin::plugin {

const std::vector<Preset>& presets() {
    static const std::vector<Preset> all = [] {
        std::vector<Preset> list;
        for (int i = 0; i < PresetData::namedResourceListSize; ++i) {
            int size = 0;
            const char* resource = PresetData::namedResourceList[i];
            const char* data = PresetData::getNamedResource(resource, size);
            Preset preset;
            preset.file = PresetData::getNamedResourceOriginalFilename(resource);
            preset.json = juce::String::fromUTF8(data, size);
            preset.name = juce::JSON::parse(preset.json).getProperty("name", preset.file).toString();
            list.push_back(std::move(preset));
        }
        std::sort(list.begin(), list.end(), [](const Preset& a, const Preset& b) { return a.file < b.file; });
        return list;
    }();
    return all;
}

const Preset& firstPreset() {
    const auto& all = presets();
    const auto harp = std::find_if(all.begin(), all.end(), [](const Preset& p) { return p.file == "lap-harp.json"; });
    return harp != all.end() ? *harp : all.front();
}

} // namespace hitchpin::plugin
