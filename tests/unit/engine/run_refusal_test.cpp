// Snapshots that cannot be true: each is refused with a line that says what,
// where and what to do, and leaves the run as it was, to the byte.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <functional>
#include <limits>

#include "engine/run.h"
#include "unit/engine/run_bench.h"

namespace lastscan::engine {
namespace {

using ::testing::HasSubstr;

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

struct Fault {
  std::string says;
  std::function<void(Sent&)> spoil;
};

// Faults of a snapshot by itself, whatever came before.
std::vector<Fault> FaultsOfOne() {
  const auto snapshot = [](auto change) { return [change](Sent& s) { change(s.snapshot); }; };
  const auto goal = [](auto change) {
    return [change](Sent& s) { change(*s.snapshot.mutable_goal()); };
  };
  return {
      {"names no run", snapshot([](auto& s) { s.clear_run(); })},
      {"nucleus 'carbon'", snapshot([](auto& s) { s.set_nucleus("carbon"); })},
      {"nucleus 'C13'", snapshot([](auto& s) { s.set_nucleus("C13"); })},
      {"nucleus ''", snapshot([](auto& s) { s.clear_nucleus(); })},
      {"observe frequency", snapshot([](auto& s) { s.set_observe_frequency_mhz(0); })},
      {"observe frequency", snapshot([](auto& s) { s.set_observe_frequency_mhz(kNaN); })},
      {"spectral width", snapshot([](auto& s) { s.set_spectral_width_hz(-2000); })},
      {"shift at the centre", snapshot([](auto& s) { s.set_centre_shift_ppm(kNaN); })},
      {"63 points",
       [](Sent& s) {
         s.snapshot.set_points(63);
         s.frame.resize(63 * 16);
       }},
      {"4194305 points", snapshot([](auto& s) { s.set_points((1u << 22) + 1); })},
      {"scans done", snapshot([](auto& s) { s.set_scans_done(0); })},
      {"send sum or mean", snapshot([](auto& s) { s.clear_accumulation(); })},
      {"domain or encoding", snapshot([](auto& s) { s.clear_domain(); })},
      {"domain or encoding", snapshot([](auto& s) { s.clear_encoding(); })},
      {"16383 bytes where 1024 points need 16384", [](Sent& s) { s.frame.pop_back(); }},
      {"16385 bytes", [](Sent& s) { s.frame.push_back('x'); }},
      {"0 bytes", [](Sent& s) { s.frame.clear(); }},
      {"receiver delay", snapshot([](auto& s) { s.set_receiver_delay_points(-1); })},
      {"receiver delay", snapshot([](auto& s) { s.set_receiver_delay_points(1024); })},
      {"receiver delay", snapshot([](auto& s) { s.set_receiver_delay_points(kNaN); })},
      {"seconds per scan", snapshot([](auto& s) { s.set_seconds_per_scan(0); })},
      {"noise window", snapshot([](auto& s) { *s.mutable_noise_window() = ShiftsFrom(95, 94); })},
      {"noise window", snapshot([](auto& s) { *s.mutable_noise_window() = ShiftsFrom(20, 40); })},
      {"widen it", snapshot([](auto& s) { *s.mutable_noise_window() = ShiftsFrom(95, 95.02); })},
      {"point 3 of run", [](Sent& s) { std::memcpy(s.frame.data() + 48, &kNaN, 8); }},
      {"target -1", goal([](auto& g) { g.set_target(-1); })},
      {"target nan", goal([](auto& g) { g.set_target(kNaN); })},
      {"assurance", goal([](auto& g) { g.set_assurance(1.5); })},
      {"tolerance", goal([](auto& g) { g.set_tolerance(0.95); })},
      {"broadening", goal([](auto& g) { g.set_broadening_hz(-1); })},
      {"broadening", goal([](auto& g) { g.set_broadening_hz(kNaN); })},
      {"outside the spectrum", goal([](auto& g) { *g.add_windows() = ShiftsFrom(10, 20); })},
      {"is not a range", goal([](auto& g) { *g.add_windows() = ShiftsFrom(101, 100); })},
      {"cover the whole spectrum", goal([](auto& g) {
         g.clear_windows();
         *g.add_excluded() = ShiftsFrom(0, 300);
       })},
      {"solvent 'moonshine'", goal([](auto& g) { g.set_solvent("moonshine"); })},
  };
}

// Faults of a snapshot that is to follow one of 64 scans.
std::vector<Fault> FaultsOfFollowing() {
  const auto snapshot = [](auto change) { return [change](Sent& s) { change(s.snapshot); }; };
  return {
      {"scans of run 'night 1' go from 64 to 64", snapshot([](auto& s) { s.set_scans_done(64); })},
      {"go from 64 to 8", snapshot([](auto& s) { s.set_scans_done(8); })},
      {"name", snapshot([](auto& s) { s.set_run("night 2"); })},
      {"instrument", snapshot([](auto& s) { s.set_instrument("bench-2"); })},
      {"nucleus", snapshot([](auto& s) { s.set_nucleus("15N"); })},
      {"accumulation", snapshot([](auto& s) { s.set_accumulation(v1::MEAN); })},
      {"sense of frequency", snapshot([](auto& s) { s.set_reversed(true); })},
      {"domain",
       [](Sent& s) {
         s.snapshot.set_domain(v1::SPECTRUM);
         s.frame.resize(s.frame.size() / 2);
       }},
      {"number of points of run 'night 1' changed from 1024 to 1000",
       [](Sent& s) {
         s.snapshot.set_points(1000);
         s.frame.resize(16000);
       }},
      {"spectral width", snapshot([](auto& s) { s.set_spectral_width_hz(2100); })},
      {"observe frequency", snapshot([](auto& s) { s.set_observe_frequency_mhz(101); })},
      {"shift at the centre", snapshot([](auto& s) { s.set_centre_shift_ppm(101); })},
      {"broadening of run 'night 1' changed from 2 to 1 Hz",
       [](Sent& s) { s.snapshot.mutable_goal()->set_broadening_hz(1); }},
  };
}

class RunRefusals : public ::testing::Test {
 protected:
  std::vector<Sent> sent_ = Snapshots(OneLine(1), Every(32, 4), WindowGoal(20));

  // Spoils `sound` by each of `faults` and offers it to `run`.
  void ExpectRefused(engine::Run& run, const Sent& sound, const std::vector<Fault>& faults) {
    const std::string advice = run.advice().SerializeAsString();
    const std::string state = run.Save();
    for (const Fault& fault : faults) {
      Sent spoilt = sound;
      fault.spoil(spoilt);
      const std::string text = RefusalOf([&] { run.Admit(spoilt.snapshot, spoilt.frame); });
      EXPECT_THAT(text, HasSubstr(fault.says));
      EXPECT_NE(text.find(": "), std::string::npos) << "says what to do: " << text;
      EXPECT_EQ(run.advice().SerializeAsString(), advice) << text;
      EXPECT_EQ(run.Save(), state) << text;
    }
  }
};

TEST_F(RunRefusals, BeforeTheFirstSnapshotNothingBegins) {
  engine::Run run(DefaultSettings());
  ExpectRefused(run, sent_[0], FaultsOfOne());
  EXPECT_TRUE(run.advice().run().empty());
  EXPECT_EQ(Admit(run, sent_[0]).SerializeAsString(), Played({sent_[0]})[0].SerializeAsString());
}

TEST_F(RunRefusals, InTheMiddleOfARunNothingChanges) {
  engine::Run run(DefaultSettings());
  Admit(run, sent_[0]);
  Admit(run, sent_[1]);
  ExpectRefused(run, sent_[2], FaultsOfOne());
  ExpectRefused(run, sent_[2], FaultsOfFollowing());
  // And it goes on as if nobody had asked.
  const auto undisturbed = Played(sent_);
  EXPECT_EQ(Admit(run, sent_[2]).SerializeAsString(), undisturbed[2].SerializeAsString());
  EXPECT_EQ(Admit(run, sent_[3]).SerializeAsString(), undisturbed[3].SerializeAsString());
}

TEST_F(RunRefusals, RoundingInAnExportIsNoOtherExperiment) {
  engine::Run run(DefaultSettings());
  Admit(run, sent_[0]);
  Sent rounded = sent_[1];
  rounded.snapshot.set_spectral_width_hz(2000.001);
  rounded.snapshot.set_observe_frequency_mhz(100.60001);
  rounded.snapshot.set_centre_shift_ppm(100.0004);
  EXPECT_NO_THROW(Admit(run, rounded));
}

}  // namespace
}  // namespace lastscan::engine
