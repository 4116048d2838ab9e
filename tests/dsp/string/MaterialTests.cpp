// Materials against standards and handbook tables.
#include "dsp/string/Material.h"

#include <catch2/catch.hpp>

#include <cmath>
#include <iostream>

using namespace hitchpin::string;

namespace {

constexpr double inch = 25.4e-3;
constexpr double ksi = 6.894757e6;

} // namespace

// ASTM A228, minimum tensile strength by diameter (tables of wire makers that quote the standard).
// Turned red by: the power-law fit in place of the table.
TEST_CASE("Music wire has the minimum strength of ASTM A228", "[string]") {
    const auto& wire = *findBuiltInMaterial("music wire");
    const std::pair<double, double> rows[] = {{.004, 439}, {.010, 387}, {.012, 377}, {.020, 350}, {.030, 330}, {.036, 321},
                                              {.040, 315}, {.051, 303}, {.063, 293}, {.080, 282}, {.100, 271}, {.250, 230}};
    for (const auto& [d, strength] : rows) {
        CAPTURE(d);
        CHECK(wire.strengthAt(d * inch) == Approx(strength * ksi).epsilon(1e-6));
    }
    // In megapascals, as printed: .010 in 2668, .020 2413, .040 2172, .063 2020, .100 1868.
    const std::pair<double, double> metric[] = {{.010, 2668}, {.020, 2413}, {.040, 2172}, {.063, 2020}, {.100, 1868}};
    for (const auto& [d, mpa] : metric)
        CHECK(wire.strengthAt(d * inch) * 1e-6 == Approx(mpa).margin(0.6));
    // Between rows it stays between their values, and falls all the way.
    CHECK(wire.strengthAt(.011 * inch) == Approx(382 * ksi).epsilon(1e-6));
    for (double d = 0.05e-3; d < 8e-3; d *= 1.02)
        CHECK(wire.strengthAt(1.02 * d) <= wire.strengthAt(d));
    // Finer than the table: no more than its first row.
    CHECK(wire.strengthAt(.001 * inch) == Approx(439 * ksi).epsilon(1e-6));
}

// The power law A/d^m of Shigley's Table 10-4 (201 kpsi·in^m, m = 0.145; from memory) lies 1.3, 1.8 and 3.6 % above
// the table's minimum at .010, .040 and .100 in: it would flatter a string. The pair often printed, 186 kpsi and
// m = 0.163 with "2060 MPa", is not even consistent: 186 kpsi·in^0.163 is 2173 MPa·mm^0.163.
TEST_CASE("The usual fit of music wire flatters it, and is often misprinted", "[string]") {
    const auto& wire = *findBuiltInMaterial("music wire");
    const std::pair<double, double> over[] = {{.010, 1.3}, {.040, 1.8}, {.100, 3.6}};
    for (const auto& [d, percent] : over) {
        const double fit = 201.0 * ksi / std::pow(d, 0.145);
        CHECK(100.0 * (fit / wire.strengthAt(d * inch) - 1.0) == Approx(percent).margin(0.06));
    }
    CHECK(186.0 * 6.894757 * std::pow(25.4, 0.163) == Approx(2173).margin(0.5));
    CHECK(201.0 * 6.894757 * std::pow(25.4, 0.145) == Approx(2211).margin(6.0));
}

// Copies of A228 print the 0.036 in maximum as 255 ksi between 358 and 352: an error for 355. The minimum beside it,
// 321, is what is used.
TEST_CASE("The table's minima fall evenly, row by row", "[string]") {
    const auto& rows = findBuiltInMaterial("music wire")->strengthByDiameter;
    for (std::size_t i = 1; i < rows.size(); ++i) {
        CAPTURE(rows[i].diameter);
        CHECK(rows[i].diameter > rows[i - 1].diameter);
        CHECK(rows[i].strength < rows[i - 1].strength);
        // Fits of drawn wire fall as d^−0.145 to d^−0.19; no step is steeper than d^−0.25.
        CHECK(rows[i].strength > rows[i - 1].strength * std::pow(rows[i - 1].diameter / rows[i].diameter, 0.25));
    }
}

// EN 10270-1, minimum strength of DH and SH wire (tables of wire makers): music wire's table and this standard's
// agree on the order of size, within 10 %.
TEST_CASE("The standards of two continents agree on hard-drawn steel", "[string]") {
    const auto& wire = *findBuiltInMaterial("music wire");
    const std::pair<double, double> dh[] = {{.20, 2800}, {.21, 2770}, {.235, 2720}, {.265, 2680}, {.29, 2660}, {.31, 2640}, {.33, 2610}};
    for (const auto& [mm, mpa] : dh) {
        CHECK(wire.strengthAt(mm * 1e-3) * 1e-6 == Approx(mpa).epsilon(0.1));
        // 2220 − 820·log10 d (from memory) gives those rows within 15 MPa where they are SH wire.
        if (mm > .28)
            CHECK(2220.0 - 820.0 * std::log10(mm) == Approx(mpa).margin(20.0));
    }
}

// Typical properties from memory: ±5 % for metals, ±20 % for the rest, or the range that is printed.
TEST_CASE("Materials lie within their typical ranges", "[string]") {
    struct Row {
        const char* name;
        double density, densityTop, gpa, gpaTop;
    };
    const Row rows[] = {{"music wire", 7850, 7850, 200, 200},       {"stainless steel", 7900, 7900, 193, 193},
                        {"iron", 7800, 7800, 190, 200},             {"yellow brass", 8530, 8530, 105, 110},
                        {"red brass", 8700, 8700, 115, 115},        {"phosphor bronze", 8800, 8860, 110, 110},
                        {"copper", 8960, 8960, 120, 120},           {"silver", 10490, 10490, 76, 76},
                        {"nickel", 8900, 8900, 207, 207},           {"tungsten", 19250, 19250, 400, 400},
                        {"aluminium", 2700, 2700, 69, 69},          {"nylon", 1050, 1140, 2.5, 8},
                        {"pvdf", 1770, 1800, 3, 9},                 {"gut", 1280, 1350, 5, 6.5},
                        {"silk", 1300, 1350, 6, 12}};
    for (const auto& row : rows) {
        CAPTURE(row.name);
        const auto* m = findBuiltInMaterial(row.name);
        REQUIRE(m != nullptr);
        CHECK(m->density >= 0.95 * row.density);
        CHECK(m->density <= 1.05 * row.densityTop);
        CHECK(m->youngsModulus >= 0.95e9 * row.gpa);
        CHECK(m->youngsModulus <= 1.05e9 * row.gpaTop);
        CHECK(m->slowModulus <= m->youngsModulus);
        CHECK(m->tensileStrength > 0.0);
        CHECK(m->workingShare > 0.0);
        CHECK(m->workingShare <= 0.8);
        CHECK(m->fill > 0.0);
        CHECK(m->fill <= 1.0);
        CHECK_FALSE(m->remarks.empty());
    }
    CHECK(std::size(rows) == builtInMaterials().size()); // a new one gets a row here
    CHECK(findBuiltInMaterial("unobtainium") == nullptr);
    // Shigley's Table 10-4 for B159 and A313 (from memory).
    CHECK(findBuiltInMaterial("phosphor bronze")->strengthAt(0.3e-3) * 1e-6 == Approx(1000).epsilon(0.05));
    CHECK(findBuiltInMaterial("stainless steel")->strengthAt(1.0e-3) * 1e-6 == Approx(1867).epsilon(0.01));
}
