// JCAMP-DX, the open exchange format of IUPAC, versions 4.24 to 6.0, for
// one-dimensional NMR: FIDs (NTUPLES) and spectra (XYDATA, NTUPLES).
//
// Published sources (from memory): McDonald and Wilks, Appl. Spectrosc. 1988,
// 42, 151 (4.24); Davies and Lampen, Appl. Spectrosc. 1993, 47, 1093 (5.00 for
// NMR); Lampen et al., Pure Appl. Chem. 1999, 71, 1549 (5.01).
// Only labels of the standard are interpreted; private labels (##$...) are skipped.
//
// Sense of an FID: real page + i * imaginary page, so that a positive frequency is
// a higher shift, and snapshot.reversed is false. Measured on two openly published
// pairs of an FID and its spectrum (tests/published): the transform taken this way
// follows the spectrum (correlation above 0.99), taken the other way it does not
// (below 0.01). A file that means the opposite sense has no label to say so; its
// sender sets snapshot.reversed.
#pragma once

#include <cstddef>
#include <iosfwd>
#include <string>
#include <string_view>

#include "formats/recording.h"

namespace lastscan::formats {

// Points in one table that we agree to hold; a file that promises more is
// refused. Duplicate counts make a few bytes stand for any number of points.
inline constexpr std::size_t kMostPointsInTable = std::size_t{1} << 23;

// True if `text` begins like a JCAMP-DX file: with ##TITLE=, after blank lines,
// comments and a byte order mark at most.
bool LooksLikeJcampDx(std::string_view text);

// The first one-dimensional NMR FID or spectrum in `text`, LINK blocks searched
// in order.
//
// FID: spectral_width_hz is 1 over the spacing of the points in seconds; the
// shift reference, when stated, is that of a point (1: the first, at the highest
// shift) of the spectrum that the FID would transform into without zero fill.
// Spectrum: spectral_width_hz is points times spacing; snapshot.reversed is set
// when the first sample has the lowest shift. An abscissa in ppm is taken as it
// stands; one in Hz is divided by the observe frequency and, when the file states
// a shift reference, moved so that the named point (in file order) has that shift.
//
// A file that does not state its observe frequency is read with none, and then
// without a shift at the centre; an abscissa in ppm needs one.
//
// A time without an offset from UTC is local time. A time that cannot be read
// leaves recorded_at unset.
//
// `name` begins every message. Throws Unreadable.
Recording ReadJcampDx(std::string_view text, const std::string& name);

// How tables of ordinates are written: packed decimal, or difference-duplicate
// form with abscissa and check values.
enum class TableForm { kAffn, kDifdup };

// Writes one FID (NTUPLES) or spectrum (XYDATA in HZ), with the cautions as
// comments. Whole numbers within 32 bits are written as they are; other ordinates
// are scaled to 31 bits by a common factor, a power of two, so that what was read
// back and is written again does not change any more. The file has the sense told
// above: the samples of a reversed FID are conjugated. What the standard has no
// label for (run, plan, accumulation, goal, booking) is not written.
// REQUIRES: snapshot.domain, points (matching samples) and spectral_width_hz set,
// observe_frequency_mhz > 0, at least 2 points. Throws std::invalid_argument
// otherwise, or when a sample is not finite.
void WriteJcampDx(std::ostream& out, const Recording& recording,
                  TableForm form = TableForm::kDifdup);

}  // namespace lastscan::formats
