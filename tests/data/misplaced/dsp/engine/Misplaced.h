// A file that breaks the layers, for the check of the check.
#include "juce_core/juce_core.h"
#include "dsp/design/MakeLoop.h"
