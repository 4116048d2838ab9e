#include "Source/report/Columns.h"

namespace hitchpin::report {

const std::vector<Column>& columns() {
    using R = ScheduleRow;
    static const std::vector<Column> all{
        {"note", "", &R::note},
        {"pitch_hz", "", &R::pitchHz},
        {"strings", "", &R::strings},
        {"speaking_length_mm", "", &R::speakingLengthMm},
        {"core", "", &R::core},
        {"windings", "", &R::windings},
        {"outer_diameter_mm", "", &R::outerDiameterMm},
        {"linear_density_kg_m", "", &R::linearDensityKgM},
        {"tension_n", "", &R::tensionN},
        {"course_tension_n", "", &R::courseTensionN},
        {"stress_mpa", "", &R::stressMpa},
        {"breaking_load_n", "", &R::breakingLoadN},
        {"breaking_share", "", &R::breakingShare},
        {"working_share", "", &R::workingShare},
        {"semitones_to_breaking", "", &R::semitonesToBreaking},
        {"stretch_mm", "", &R::stretchMm},
        {"inharmonicity", "", &R::inharmonicity},
        {"impedance_kg_s", "", &R::impedanceKgS},
        {"longitudinal_hz", "", &R::longitudinalHz},
        {"partials_hz", "partial_#_hz", &R::partialsHz},
        {"decay_t60_s", "decay_t60_#_s", &R::decayT60S},
        {"board_t60_s", "board_t60_#_s", &R::boardT60S},
        {"board_shift_cents", "", &R::boardShiftCents},
        {"warnings", "", &R::warnings},
    };
    return all;
}

} // namespace hitchpin::report
