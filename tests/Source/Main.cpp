// Runs tests with JUCE's message manager alive, as a host would have it.
#define CATCH_CONFIG_RUNNER
#include <catch2/catch.hpp>

#include <juce_gui_basics/juce_gui_basics.h>

#include <X11/Xlib.h>

int main(int argc, char* argv[]) {
    const juce::ScopedJuceInitialiser_GUI juceLives;
    // As JUCE's own applications do: on a screen without a window manager some of the names that JUCE sets on its
    // windows do not exist, and X's default is to end the program.
    XSetErrorHandler([](Display*, XErrorEvent*) { return 0; });
    return Catch::Session().run(argc, argv);
}
