// Runs tests with JUCE's message manager alive, as a host would have it.
#define CATCH_CONFIG_RUNNER
#include <catch2/catch.hpp>

#include <juce_gui_basics/juce_gui_basics.h>

int main(int argc, char* argv[]) {
    const juce::ScopedJuceInitialiser_GUI juceLives;
    return Catch::Session().run(argc, argv);
}
