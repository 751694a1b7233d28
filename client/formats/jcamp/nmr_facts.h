// What the NMR labels of a block say about the experiment.
#pragma once

#include <google/protobuf/timestamp.pb.h>

#include <optional>
#include <string>
#include <string_view>

#include "formats/jcamp/labelled_records.h"
#include "formats/recording.h"

namespace lastscan::formats::jcamp {

// .SHIFT REFERENCE: the point of that number, counted from 1 and perhaps between
// two points, has this shift.
struct ShiftReference {
  double point = 1;
  double shift_ppm = 0;
};

// Title, sample, instrument, solvent, nucleus, observe frequency, scans done and
// the time recorded, as far as stated (observe frequency and scans done: else 0). Throws Unreadable
// when a number is none or cannot be true.
void ReadFacts(const Block& block, Recording& recording);

// Nothing when there is none or its point and shift are not numbers: such a line
// is often left blank, and the caller can state the shift himself.
std::optional<ShiftReference> ReadShiftReference(const Block& block);

// "^13C", "13C", "C13" and "13 c" all give "13C"; other text is returned as it is.
std::string NucleusName(std::string_view text);

// LONG DATE: "2027/01/31 07:30:00.000 +0100", also with '-' and 'T', and with the
// time or the offset left out. Nothing when the text is no such time.
std::optional<google::protobuf::Timestamp> ParseLongDate(std::string_view text);

}  // namespace lastscan::formats::jcamp
