#include "dsp/string/Material.h"

#include <algorithm>
#include <cmath>
#include <iterator>

namespace hitchpin::string {
namespace {

constexpr double inch = 0.0254;       // m
constexpr double ksi = 6.894757293e6; // Pa

/// ASTM A228 music wire, minimum tensile strength by diameter. The table and not the usual power-law fit, which lies
/// 1 to 4 % above it.
std::vector<StrengthPoint> musicWireMinimum() {
    static constexpr double inchKsi[][2] = {
        {.004, 439}, {.006, 415}, {.008, 399}, {.010, 387}, {.012, 377}, {.014, 369}, {.016, 362}, {.018, 356},
        {.020, 350}, {.022, 345}, {.024, 341}, {.026, 337}, {.028, 333}, {.030, 330}, {.032, 327}, {.034, 324},
        {.036, 321}, {.038, 318}, {.040, 315}, {.042, 313}, {.045, 309}, {.048, 306}, {.051, 303}, {.055, 300},
        {.059, 296}, {.063, 293}, {.067, 290}, {.072, 287}, {.080, 282}, {.090, 276}, {.100, 271}, {.125, 261},
        {.162, 249}, {.250, 230}};
    std::vector<StrengthPoint> table;
    for (const auto& [diameter, strength] : inchKsi)
        table.push_back({diameter * inch, strength * ksi});
    return table;
}

/// A/d^m (d in mm, A in MPa·mm^m) laid out as a table, from memory of Shigley, Mechanical Engineering Design,
/// Table 10-4.
std::vector<StrengthPoint> powerLaw(std::initializer_list<double> diametersMm, double aMpa, double m) {
    std::vector<StrengthPoint> table;
    for (const double d : diametersMm)
        table.push_back({d * 1e-3, aMpa * 1e6 / std::pow(d, m)});
    return table;
}

std::vector<Material> makeMaterials() {
    constexpr double giga = 1e9, mega = 1e6;
    const char* typical = "typical handbook values, from memory";
    std::vector<Material> all;
    const auto add = [&](std::string name, double density, double fast, double slow, double strength, double share,
                         double bendingLoss, double constantLoss, double expansion, std::string remarks) -> Material& {
        Material& m = all.emplace_back();
        m.name = std::move(name);
        m.density = density;
        m.youngsModulus = fast * giga;
        m.slowModulus = slow * giga;
        m.tensileStrength = strength * mega;
        m.workingShare = share;
        m.bendingLoss = bendingLoss;
        m.constantLoss = constantLoss;
        m.expansionPerKelvin = expansion;
        m.remarks = std::move(remarks);
        return m;
    };
    // Losses of metals: Valette and Cuesta give δ of 1e-3 to 5e-3 and a constant of 1e-4 to 2e-4 (from memory).
    add("music wire", 7850, 200, 200, 2172, 0.70, 2e-3, 1e-4, 11.5e-6,
        "strength: ASTM A228 minimum by diameter; E from 203 GPa (fine) to 193 GPa (thick), 200 taken (Shigley Table "
        "10-5); the rest typical handbook values, from memory")
        .strengthByDiameter = musicWireMinimum();
    add("stainless steel", 7900, 193, 193, 1867, 0.70, 2e-3, 1.5e-4, 17.2e-6,
        "302 wire; strength: ASTM A313 by Shigley Table 10-4, from memory")
        .strengthByDiameter = powerLaw({0.3, 0.5, 0.8, 1.2, 1.8, 2.5}, 1867, 0.146);
    add("iron", 7800, 195, 195, 900, 0.75, 2e-3, 1.5e-4, 12e-6,
        "soft drawn iron as for early keyboards: 700 to 1100 MPa, from memory");
    add("yellow brass", 8530, 107, 107, 850, 0.75, 3e-3, 1.5e-4, 19.5e-6,
        "hard drawn, 70 % copper; 600 to 900 MPa, from memory");
    add("red brass", 8700, 115, 115, 650, 0.75, 3e-3, 1.5e-4, 18.5e-6,
        "hard drawn, 85 % copper; 500 to 700 MPa, from memory");
    add("phosphor bronze", 8850, 110, 110, 1000, 0.75, 3e-3, 1.5e-4, 17.8e-6,
        "strength: ASTM B159 by Shigley Table 10-4, from memory")
        .strengthByDiameter = powerLaw({0.6, 0.8, 1.2, 2.0}, 913, 0.028);
    all.back().strengthByDiameter.insert(all.back().strengthByDiameter.begin(), {0.1e-3, 1000e6});
    // Wires for windings: their strength is not asked for in a winding; soft wire's is given.
    add("copper", 8960, 120, 120, 220, 0.50, 3e-3, 2e-4, 16.7e-6, typical);
    add("silver", 10490, 76, 76, 170, 0.50, 3e-3, 2e-4, 19e-6, typical);
    add("nickel", 8900, 207, 207, 400, 0.50, 3e-3, 2e-4, 13.3e-6, typical);
    add("tungsten", 19250, 400, 400, 2000, 0.60, 2e-3, 1e-4, 4.5e-6, typical);
    add("aluminium", 2700, 69, 69, 150, 0.50, 3e-3, 2e-4, 23e-6, typical);
    // Polymers and gut: fast E exceeds slow E. Losses after the fits of Woodhouse (2004) for nylon guitar strings:
    // η_B 2.0e-2 to 2.4e-2 in bending, η_F 1.4e-4 to 4e-4 constant.
    add("nylon", 1070, 4.5, 3.0, 320, 0.60, 2.2e-2, 4e-4, 90e-6,
        "monofilament; E rises with stress (Lynch-Aird and Woodhouse 2017): give your own where it matters; "
        "losses after Woodhouse 2004; the rest from memory");
    add("pvdf", 1780, 5.5, 3.5, 500, 0.60, 2.0e-2, 3e-4, 120e-6,
        "monofilament; E rises with stress (Lynch-Aird and Woodhouse 2017); the rest from memory");
    add("gut", 1300, 5.5, 5.5, 340, 0.75, 2.5e-2, 5e-4, 0.0,
        "E constant with stress, moves with humidity far more than with temperature (Lynch-Aird and Woodhouse 2018): "
        "no expansion is assumed; the rest from memory");
    add("silk", 1320, 9.0, 7.0, 400, 0.60, 2.5e-2, 5e-4, 0.0, "filaments; from memory").fill = 0.85;
    return all;
}

} // namespace

double Material::strengthAt(double diameter) const {
    if (strengthByDiameter.empty())
        return tensileStrength;
    const auto above = std::upper_bound(strengthByDiameter.begin(), strengthByDiameter.end(), diameter,
                                        [](double d, const StrengthPoint& point) { return d < point.diameter; });
    if (above == strengthByDiameter.begin())
        return above->strength;
    if (above == strengthByDiameter.end())
        return std::prev(above)->strength;
    const auto& low = *std::prev(above);
    const double t = (diameter - low.diameter) / (above->diameter - low.diameter);
    return low.strength + t * (above->strength - low.strength);
}

const std::vector<Material>& builtInMaterials() {
    static const std::vector<Material> all = makeMaterials();
    return all;
}

const Material* findBuiltInMaterial(std::string_view name) {
    const auto& all = builtInMaterials();
    const auto found = std::find_if(all.begin(), all.end(), [&](const Material& m) { return m.name == name; });
    return found == all.end() ? nullptr : &*found;
}

} // namespace hitchpin::string
