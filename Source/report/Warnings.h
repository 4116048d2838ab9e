// What a schedule marks: strings near or over breaking, very slack ones, jumps at a break, and how to stay whole.
#pragma once

#include "Source/document/Document.h"

namespace hitchpin::report {

/// Under this share of the breaking load a string is marked as slack: it sounds dull and goes sharp when plucked
/// (common practice: about 0.15 to 0.2).
inline constexpr double slackShare = 0.15;
/// What a break may jump by without being marked (common practice).
inline constexpr double breakTensionJump = 0.15;
inline constexpr double breakInharmonicityFactor = 1.5;
/// The core of a wound string is bent and pressed by its winding (common practice).
inline constexpr double woundWorkingShare = 0.60;

/// The most of its breaking load that this build is usually asked to carry: the material's, of a wound string's
/// core no more than `woundWorkingShare`; a material of the file's own is taken at its word.
double workingShare(const string::Build&, const document::Instrument&);

std::vector<std::string> courseWarnings(const design::CourseDescription&, const document::Instrument&);
std::vector<std::string> breakWarnings(const design::InstrumentDescription&);
std::vector<std::string> cautions(bool anyOverWorkingShare);

} // namespace hitchpin::report
