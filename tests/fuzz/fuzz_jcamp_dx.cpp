// Fuzzes the JCAMP-DX reader. Any text is either refused with one line or read; what
// was read is sound and survives being written and read again.
//
// Started with LASTSCAN_FUZZ_SEEDS=FOLDER it only writes good first inputs there.
#include <algorithm>
#include <cmath>
#include <cstdint>
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <sstream>
#include <stdexcept>
#include <string>
#include <string_view>

#include "formats/jcamp_dx.h"

namespace {

using lastscan::formats::Recording;
using lastscan::formats::TableForm;

void Require(bool holds, const char* what) {
  if (holds) return;
  std::fprintf(stderr, "not so: %s\n", what);
  std::abort();
}

void CheckSound(const Recording& recording) {
  const lastscan::v1::Snapshot& snapshot = recording.snapshot;
  const std::size_t each = snapshot.domain() == lastscan::v1::FID ? 2 : 1;
  Require(recording.samples.size() == each * snapshot.points(), "points match samples");
  for (double sample : recording.samples) Require(std::isfinite(sample), "samples are finite");
  // Strings of a message must be UTF-8: serializing tells.
  std::string bytes;
  Require(snapshot.SerializeToString(&bytes), "the snapshot can be sent");
}

void CheckRoundTrip(const Recording& recording, TableForm form) {
  std::ostringstream out;
  try {
    WriteJcampDx(out, recording, form);
  } catch (const std::invalid_argument&) {
    return;  // for instance a spectral width that overflowed
  }
  const Recording again = lastscan::formats::ReadJcampDx(out.str(), "again");
  Require(again.samples.size() == recording.samples.size(), "as many samples read again");
  double largest = 0;
  double worst = 0;
  for (std::size_t i = 0; i < again.samples.size(); ++i) {
    largest = std::max(largest, std::abs(recording.samples[i]));
    worst = std::max(worst, std::abs(recording.samples[i] - again.samples[i]));
  }
  Require(worst <= largest * 0x1p-30, "samples read again to 30 bits");
}

// An FID or spectrum small enough to be changed in interesting places.
Recording Small(lastscan::v1::Domain domain, double scale) {
  Recording recording;
  lastscan::v1::Snapshot& snapshot = recording.snapshot;
  snapshot.set_domain(domain);
  snapshot.set_points(24);
  snapshot.set_nucleus("13C");
  snapshot.set_observe_frequency_mhz(100);
  snapshot.set_spectral_width_hz(1000);
  snapshot.set_centre_shift_ppm(100);
  snapshot.set_scans_done(16);
  snapshot.mutable_recorded_at()->set_seconds(1'800'000'000);
  recording.has_centre_shift = true;
  const int samples = domain == lastscan::v1::FID ? 48 : 24;
  for (int i = 0; i < samples; ++i) recording.samples.push_back(scale * (i % 7 - 3) * (i / 5));
  return recording;
}

void WriteSeeds(const std::string& folder) {
  int number = 0;
  std::string linked = "##TITLE= all\n##JCAMP-DX= 5.01\n##DATA TYPE= LINK\n##BLOCKS= 4\n";
  const auto write = [&](const std::string& text) {
    std::ofstream(folder + "/seed" + std::to_string(++number), std::ios::binary) << text;
  };
  for (lastscan::v1::Domain domain : {lastscan::v1::FID, lastscan::v1::SPECTRUM}) {
    for (TableForm form : {TableForm::kDifdup, TableForm::kAffn}) {
      for (double scale : {1.0, 1.0 / 3}) {
        std::ostringstream out;
        WriteJcampDx(out, Small(domain, scale), form);
        // Without the comments, which take most of the length.
        std::istringstream lines(out.str());
        std::string text;
        for (std::string line; std::getline(lines, line);) {
          if (line.compare(0, 2, "$$") != 0) text += line + '\n';
        }
        write(text);
        linked += text;
      }
    }
  }
  write(linked + "##END=\n");
}

}  // namespace

extern "C" int LLVMFuzzerInitialize(int*, char***) {
  if (const char* folder = std::getenv("LASTSCAN_FUZZ_SEEDS")) {
    WriteSeeds(folder);
    std::exit(0);
  }
  return 0;
}

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  const std::string_view text(reinterpret_cast<const char*>(data), size);
  Recording recording;
  try {
    recording = lastscan::formats::ReadJcampDx(text, "input");
  } catch (const lastscan::formats::Unreadable& refusal) {
    Require(std::string_view(refusal.what()).find('\n') == std::string_view::npos,
            "a refusal is one line");
    return 0;
  }
  CheckSound(recording);
  if (recording.samples.size() > 100'000) return 0;  // a duplicate count: slow, not new
  CheckRoundTrip(recording, TableForm::kDifdup);
  CheckRoundTrip(recording, TableForm::kAffn);
  return 0;
}
