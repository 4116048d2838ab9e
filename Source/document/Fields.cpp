// Every key of the instrument file, version 1.
#include "Source/document/FieldTypes.h"

namespace hitchpin::document {

template <> const std::vector<std::string>& names<Stretch>() {
    static const std::vector<std::string> all{"none", "octaves 2:1", "octaves 4:2"};
    return all;
}
template <> const std::vector<std::string>& names<Tuned>() {
    static const std::vector<std::string> all{"alone", "on the board"};
    return all;
}
template <> const std::vector<std::string>& names<CoreShape>() {
    static const std::vector<std::string> all{"round", "hex"};
    return all;
}
template <> const std::vector<std::string>& names<Measured>() {
    static const std::vector<std::string> all{"slack", "at pitch"};
    return all;
}
template <> const std::vector<std::string>& names<WindingShape>() {
    static const std::vector<std::string> all{"round", "flat"};
    return all;
}
template <> const std::vector<std::string>& names<End>() {
    static const std::vector<std::string> all{"hinged", "clamped", "free"};
    return all;
}
template <> const std::vector<std::string>& names<BridgeKind>() {
    static const std::vector<std::string> all{"rigid", "resistance", "soundboard"};
    return all;
}
template <> const std::vector<std::string>& names<With>() {
    static const std::vector<std::string> all{"finger", "plectrum", "felt", "tangent", "bow"};
    return all;
}
template <> const std::vector<std::string>& names<Notes>() {
    static const std::vector<std::string> all{"as built", "every key strung"};
    return all;
}

namespace {

Allowed number(std::string unit, Range range) { return {std::move(unit), range}; }
Allowed count(int low, int high) { return {"", from(low, high)}; }
Allowed list(std::string unit, Range range, std::size_t fewest, std::size_t most) {
    return {std::move(unit), range, fewest, most};
}
Allowed pairs(std::string unit, Range range, std::string secondUnit, Range second, std::size_t most) {
    return {std::move(unit), range, 0, most, Allowed::Second{std::move(secondUnit), second}};
}
Allowed entries(std::size_t fewest, std::size_t most) { return {"", {}, fewest, most}; }
Allowed differences(std::size_t most) { return {"", {}, 0, most, {}, true}; }
const Allowed anything;

} // namespace

template <> const Table<Tuning>& table<Tuning>() {
    using R = Tuning;
    static const Table<R> all{
        "tuning",
        {field("a4_hz", &R::a4Hz, number("Hz", from(200, 1000)), "What A4 sounds."),
         field("temperament", &R::temperament, anything, "Name of a temperament."),
         field("root", &R::root, anything, "The note from which temperament and offsets count."),
         field("offsets_cents", &R::offsetsCents, number("cents", from(-100, 100)),
               "Added to the temperament's twelve notes, from the root up."),
         field("stretch", &R::stretch, anything, "Octaves stretched so that these partials of the strings coincide."),
         field("tuned", &R::tuned, anything, "Brought to pitch alone, or on the board as a tuner does.")}};
    return all;
}

template <> const Table<Climate>& table<Climate>() {
    using R = Climate;
    static const Table<R> all{"climate",
                              {field("temperature_c", &R::temperatureC, number("°C", from(-40, 80)),
                                     "Where the instrument is played. It was tuned at 20 °C and drifts from there."),
                               field("frame_expansion_per_k", &R::frameExpansionPerK, number("1/K", from(-1e-4, 1e-3)),
                                     "Thermal expansion of the frame that holds the strings.")}};
    return all;
}

template <> const Table<Material>& table<Material>() {
    using R = Material;
    static const Table<R> all{
        "material",
        {field("density_kg_m3", &R::densityKgM3, number("kg/m³", over(0, 30000)), "Density.").require(),
         field("youngs_modulus_gpa", &R::youngsModulusGpa, number("GPa", over(0, 1000)),
               "Young's modulus at the speed of vibration: bending, longitudinal waves.")
             .require(),
         field("slow_modulus_gpa", &R::slowModulusGpa, number("GPa", over(0, 1000)),
               "Young's modulus under a held pull: stretch, thinning, temperature.")
             .ifAbsent("as youngs_modulus_gpa"),
         field("tensile_strength_mpa", &R::tensileStrengthMpa, number("MPa", over(0, 20000)),
               "Breaking stress, where no table by diameter is given.")
             .require(),
         field("strength_by_diameter", &R::strengthByDiameter,
               pairs("mm", over(0, 50), "MPa", over(0, 20000), 1000), "Breaking stress by rising diameter."),
         field("working_share", &R::workingShare, number("", over(0, 1)),
               "The most of the breaking load that is usual in work."),
         field("fill", &R::fill, number("", over(0, 1)), "Filled share of the circle; under 1 for filaments."),
         field("bending_loss", &R::bendingLoss, number("", from(0, 1)), "δ in 1/Q = δ·Bn²/(1+Bn²)."),
         field("constant_loss", &R::constantLoss, number("", from(0, 1)), "Added to 1/Q as it is."),
         field("expansion_per_k", &R::expansionPerK, number("1/K", from(-1e-3, 1e-3)), "Thermal expansion."),
         field("remarks", &R::remarks, anything, "Where the figures come from.")}};
    return all;
}

template <> const Table<Core>& table<Core>() {
    using R = Core;
    static const Table<R> all{
        "core",
        {field("material", &R::material, anything, "Name of a material.").require(),
         field("diameter_mm", &R::diameterMm, number("mm", over(0, 50)), "Diameter; across flats for a hexagon.")
             .require(),
         field("shape", &R::shape, anything, "Cross-section."),
         field("measured", &R::measured, anything,
               "Whether the diameter was taken on the slack string, which thins on its way to pitch.")}};
    return all;
}

template <> const Table<Winding>& table<Winding>() {
    using R = Winding;
    static const Table<R> all{
        "winding",
        {field("material", &R::material, anything, "Name of a material.").require(),
         field("shape", &R::shape, anything, "Round or flat wire."),
         field("diameter_mm", &R::diameterMm, number("mm", over(0, 20)), "Of round wire.").ifAbsent("none"),
         field("thickness_mm", &R::thicknessMm, number("mm", over(0, 20)), "Of flat wire, along the radius.")
             .ifAbsent("none"),
         field("width_mm", &R::widthMm, number("mm", over(0, 50)), "Of flat wire, along the string.").ifAbsent("none"),
         field("bare_mm", &R::bareMm, number("mm", from(0, 10000)),
               "Core left bare within the speaking length, at the nut and at the bridge."),
         field("loss", &R::loss, number("", from(0, 1)), "Added to 1/Q by the winding.")}};
    return all;
}

template <> const Table<Ends>& table<Ends>() {
    using R = Ends;
    static const Table<R> all{"ends",
                              {field("nut", &R::nut, anything, "How the string is held at the nut."),
                               field("bridge", &R::bridge, anything, "How the string is held at the bridge.")}};
    return all;
}

template <> const Table<Beyond>& table<Beyond>() {
    using R = Beyond;
    static const Table<R> all{
        "beyond_mm",
        {field("nut", &R::nut, number("mm", from(0, 10000)), "String between tuning pin and nut."),
         field("bridge", &R::bridge, number("mm", from(0, 10000)), "String between bridge and hitch pin."),
         field("rings", &R::rings, anything, "Whether these lengths are left to ring.")}};
    return all;
}

template <> const Table<Plan>& table<Plan>() {
    using R = Plan;
    static const Table<R> all{
        "plan",
        {field("nut_mm", &R::nutMm, number("mm", from(-100000, 100000)), "x and y of the string at the nut."),
         field("bridge_mm", &R::bridgeMm, number("mm", from(-100000, 100000)), "x and y of the string at the bridge.")}};
    return all;
}

template <> const Table<BoardMode>& table<BoardMode>() {
    using R = BoardMode;
    static const Table<R> all{
        "mode",
        {field("frequency_hz", &R::frequencyHz, number("Hz", over(0, 50000)), "Where the soundboard resonates.").require(),
         field("q", &R::q, number("", over(0, 100000)), "How sharply.").require(),
         field("mass_kg", &R::massKg, number("kg", over(0, 10000)), "Effective mass where its shape is 1.").require(),
         field("angle_deg", &R::angleDeg, number("degrees", from(-180, 180)),
               "Direction of its motion, from across (0) towards into (90)."),
         field("shape", &R::shape, list("", from(-1000, 1000), 0, 256), "Its motion at each point of the bridges on its board, in the file's order."),
         field("pan", &R::pan, number("", from(-1, 1)), "Where it is heard, from left (-1) to right (1).")}};
    return all;
}

template <> const Table<Bridge>& table<Bridge>() {
    using R = Bridge;
    static const Table<R> all{
        "bridge",
        {field("name", &R::name, anything, "By which courses refer to it."),
         field("kind", &R::kind, anything, "What the strings drive."),
         field("board", &R::board, anything, "Name of an earlier bridge on whose soundboard it stands.")
             .ifAbsent("a board of its own"),
         field("points", &R::points, count(1, 256), "Places along it that move for themselves."),
         field("resistance_kg_s", &R::resistanceKgS, number("kg/s", over(0, 1e9)),
               "Of a resistance, or what a soundboard's modes leave over, at each point."),
         field("modes", &R::modes, entries(0, 1000), "The soundboard's modes, given by the bridge whose board it is.")}};
    return all;
}

template <> const Table<Course>& table<Course>() {
    using R = Course;
    static const Table<R> all{
        "course",
        {field("note", &R::note, anything, "The note it sounds, through the tuning: \"C4\", \"F#2\", \"Bb3\".")
             .ifAbsent("pitch_hz or tension_n is given"),
         field("pitch_hz", &R::pitchHz, number("Hz", over(0, 20000)), "The pitch it sounds, of the first partial.")
             .ifAbsent("note or tension_n is given"),
         field("tension_n", &R::tensionN, number("N", over(0, 1e6)), "The pull on a string; the pitch follows.")
             .ifAbsent("note or pitch_hz is given"),
         field("cents", &R::cents, number("cents", from(-1200, 1200)), "Added to the pitch."),
         field("strings", &R::strings, count(1, 12), "Strings that sound together.").ofWholeCourse(),
         field("detune_cents", &R::detuneCents, list("cents", from(-100, 100), 0, 12),
               "Added to the pitch of each string.")
             .ofWholeCourse(),
         field("speaking_length_mm", &R::speakingLengthMm, number("mm", over(0, 10000)), "From nut to bridge.").require(),
         field("core", &R::core, anything, "The string, or what is wound upon.").require(),
         field("windings", &R::windings, entries(0, 2), "The inner first."),
         field("linear_density_g_m", &R::linearDensityGM, number("g/m", over(0, 10000)),
               "Weighed: replaces the computed one.")
             .ifAbsent("computed from the build"),
         field("bending_stiffness_n_m2", &R::bendingStiffnessNM2, number("N·m²", from(0, 1000)),
               "Measured: replaces the computed one.")
             .ifAbsent("computed from the build"),
         field("ends", &R::ends, anything, "How the ends are held."),
         field("each", &R::each, differences(12), "What differs from string to string: the same keys, once a string.")
             .ofWholeCourse(),
         field("bridge", &R::bridge, anything, "Name of its bridge.").ifAbsent("the first bridge").ofWholeCourse(),
         field("bridge_position", &R::bridgePosition, number("", from(0, 1)), "Where along the bridge.")
             .ifAbsent("spread evenly, in the file's order")
             .ofWholeCourse(),
         field("pluck_ratio", &R::pluckRatio, number("", over(0, 0.99)),
               "Pluck point as a share of the length, from the bridge.")
             .ifAbsent("0.2, or what pluck_point_mm or strike_ratio says")
             .ofWholeCourse(),
         field("pluck_point_mm", &R::pluckPointMm, number("mm", over(0, 10000)), "Pluck point from the bridge.")
             .ifAbsent("pluck_ratio holds")
             .ofWholeCourse(),
         field("strike_ratio", &R::strikeRatio, number("", over(0, 0.99)),
               "Strike point as a share of the length, from the nut.")
             .ifAbsent("0.125 where felt or tangent plays")
             .ofWholeCourse(),
         field("damper", &R::damper, anything, "Whether a damper falls when the key is let go.").ofWholeCourse(),
         field("frets", &R::frets, count(0, 60), "Frets that may stop it, a semitone each.").ofWholeCourse(),
         field("beyond_mm", &R::beyondMm, anything, "Lengths that do not speak."),
         field("plan", &R::plan, anything, "Where it lies on the drawing."),
         field("remarks", &R::remarks, anything, "Anything worth noting.")}};
    return all;
}

template <> const Table<Hammer>& table<Hammer>() {
    using R = Hammer;
    static const Table<R> all{
        "hammer",
        {field("note", &R::note, anything, "Where on the compass; between given notes it is graded.").require(),
         field("mass_g", &R::massG, number("g", over(0, 1000)), "Mass of the hammer.").require(),
         field("stiffness", &R::stiffness, number("N/m^p", over(0, 1e15)), "K in F = K·x^p.").require(),
         field("exponent", &R::exponent, number("", from(1, 6)), "p in F = K·x^p.")}};
    return all;
}

template <> const Table<TangentMeasures>& table<TangentMeasures>() {
    using R = TangentMeasures;
    static const Table<R> all{
        "tangent",
        {field("lift_mm", &R::liftMm, number("mm", over(0, 50)), "How far it lifts the string."),
         field("speed_m_s", &R::speedMS, number("m/s", over(0, 20)), "How fast it arrives.")}};
    return all;
}

template <> const Table<BowMeasures>& table<BowMeasures>() {
    using R = BowMeasures;
    static const Table<R> all{
        "bow",
        {field("point_ratio", &R::pointRatio, number("", over(0, 0.99)), "Share of the length, from the bridge."),
         field("force_n", &R::forceN, number("N", over(0, 100)), "How hard it is pressed."),
         field("speed_m_s", &R::speedMS, number("m/s", over(0, 10)), "How fast it is drawn."),
         field("static_friction", &R::staticFriction, number("", over(0, 5)), "Coefficient while it sticks."),
         field("sliding_friction", &R::slidingFriction, number("", over(0, 5)), "Coefficient while it slips.")}};
    return all;
}

template <> const Table<Playing>& table<Playing>() {
    using R = Playing;
    static const Table<R> all{
        "playing",
        {field("with", &R::with, anything, "What sets the strings going."),
         field("width_mm", &R::widthMm, number("mm", from(0, 100)), "String covered by finger or plectrum."),
         field("force_n", &R::forceN, number("N", over(0, 200)), "Held just before finger or plectrum lets go."),
         field("height_mm", &R::heightMm, number("mm", over(0, 100)), "How far the string is drawn aside.")
             .ifAbsent("force_n holds"),
         field("angle_deg", &R::angleDeg, number("degrees", from(-180, 180)),
               "Direction of the pluck, from across (0) towards into (90)."),
         field("softness_mm_n", &R::softnessMmN, number("mm/N", from(0, 100)), "How far the fingertip or plectrum yields."),
         field("notes", &R::notes, anything, "Which keys sound: those of the courses and their frets, or every one."),
         field("velocity", &R::velocity, pairs("", from(0, 127), "", from(0, 1000), 128),
               "MIDI velocity to the measure that drives the string (N, mm or m/s).")
             .ifAbsent("the measure times velocity/64"),
         field("bend_semitones", &R::bendSemitones, number("semitones", from(0, 96)), "Reach of the pitch wheel."),
         field("channel_per_course", &R::channelPerCourse, anything, "Whether each MIDI channel plays one course."),
         field("hammers", &R::hammers, entries(0, 128), "Felt hammers over the compass."),
         field("tangent", &R::tangent, anything, "Measures of a tangent."),
         field("bow", &R::bow, anything, "Measures of a bow.")}};
    return all;
}

template <> const Table<Instrument>& table<Instrument>() {
    using R = Instrument;
    static const Table<R> all{
        "instrument",
        {field("name", &R::name, anything, "What it is called."),
         field("remarks", &R::remarks, anything, "Anything worth noting."),
         field("tuning", &R::tuning, anything, "Pitch and temperament."),
         field("climate", &R::climate, anything, "Temperature and the frame."),
         field("materials", &R::materials, anything, "Materials of the file's own, by name."),
         field("gauges", &R::gauges, list("mm", over(0, 50), 0, 1000), "Diameters in stock, by material."),
         field("bridges", &R::bridges, entries(0, 16), "What the strings drive.").ifAbsent("one rigid bridge \"main\""),
         field("courses", &R::courses, entries(1, 4096), "The strings, course by course.").require(),
         field("playing", &R::playing, anything, "How it is played.")}};
    return all;
}

} // namespace hitchpin::document
