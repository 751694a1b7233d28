#include "rehearsal/scenarios.h"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <utility>

#include "rehearsal/retrace.h"

namespace lastscan::rehearsal {
namespace {

constexpr double kTarget = 20;            // height over rms
constexpr std::size_t kLimitingLine = 0;  // in the list of MakeSample
constexpr double kSecondsPerScan = 2.5;
constexpr int kLooks = 64;

// The scan at which the limiting line would truly reach the target.
double ScansNeeded(const InventedSample& sample) {
  const double ratio = kTarget / sample.lines.at(kLimitingLine).signal_to_noise_per_scan;
  return ratio * ratio;
}

std::string Number(double value, int digits = 0) {
  char text[32];
  std::snprintf(text, sizeof text, "%.*f", digits, value);
  return text;
}

std::string ReachesTarget(const InventedSample& sample) {
  return "The limiting line at 168.2 ppm truly reaches " + Number(kTarget) + " at scan " +
         Number(std::ceil(ScansNeeded(sample)));
}

// The deuterated carbon of chloroform: three equal lines 32 Hz apart (common
// practice, no source).
void AddSolvent(InventedSample& sample, double signal_to_noise_per_scan) {
  const double apart_ppm = 32.0 / sample.observe_frequency_mhz;
  for (const int side : {-1, 0, 1}) {
    sample.lines.push_back({77.16 + side * apart_ppm, 1.2, signal_to_noise_per_scan});
  }
}

InventedSample EmptySample(const std::string& run, const std::string& name, std::uint64_t planned) {
  InventedSample sample;
  sample.run = run;
  sample.instrument = "bench-1";
  sample.sample = name;
  sample.receiver_delay_points = 67.98;
  sample.phase_radians = 0.7;
  sample.scans_planned = planned;
  sample.seconds_per_scan = kSecondsPerScan;
  sample.rounded = true;
  return sample;
}

// Ten carbons in chloroform. The limiting one, a carbonyl without protons,
// needs `scans_needed` scans for the target; the others have its height times
// a factor: those with protons stand out, those without do not.
InventedSample MakeSample(const std::string& run, const std::string& name, std::uint64_t planned,
                          double scans_needed) {
  InventedSample sample = EmptySample(run, name, planned);
  const double weakest = kTarget / std::sqrt(scans_needed);
  struct Carbon {
    double shift_ppm;
    double width_hz;
    double factor;
  };
  for (const auto& [shift, width, factor] :
       {Carbon{168.23, 1.4, 1.0}, Carbon{141.57, 1.5, 1.25}, Carbon{129.44, 1.3, 5.2},
        Carbon{127.81, 1.3, 5.0}, Carbon{115.32, 1.8, 1.6}, Carbon{71.48, 1.6, 2.8},
        Carbon{63.92, 1.9, 2.6}, Carbon{45.16, 1.5, 3.1}, Carbon{31.74, 1.3, 3.4},
        Carbon{22.39, 1.1, 3.9}}) {
    sample.lines.push_back({shift, width, weakest * factor});
  }
  AddSolvent(sample, 6 * weakest);
  return sample;
}

v1::Goal CarbonylGoal() {
  v1::Goal goal;
  goal.set_kind(v1::WEAKEST_WINDOW);
  goal.set_target(kTarget);
  goal.set_convention(v1::HEIGHT_OVER_RMS);
  goal.set_solvent("chloroform-d");
  goal.set_broadening_hz(1);
  const auto add = [&](double low, double high) {
    v1::ShiftRange* window = goal.add_windows();
    window->set_low_ppm(low);
    window->set_high_ppm(high);
  };
  add(165, 172);
  add(139, 144);
  return goal;
}

Scenario Make(std::string name, std::string story, InventedSample sample,
              std::optional<double> booking_hours, std::string truth) {
  Scenario scenario;
  scenario.name = std::move(name);
  scenario.story = std::move(story);
  scenario.looks = EvenLooks(sample.scans_planned, kLooks);
  scenario.sample = std::move(sample);
  scenario.goal = CarbonylGoal();
  scenario.booking_hours = booking_hours;
  scenario.truth = std::move(truth);
  return scenario;
}

Scenario StrongSample() {
  auto sample = MakeSample("larch-extract-1", "larch extract, fraction 1", 8192, 1500);
  const std::string truth = ReachesTarget(sample) + ", less than a fifth of the plan.";
  return Make("strong-sample",
              "The operator guessed the scans for a weak sample; it is a strong one.",
              std::move(sample), 8, truth);
}

Scenario OnCourse() {
  auto sample = MakeSample("larch-extract-2", "larch extract, fraction 2", 8192, 6400);
  const std::string truth = ReachesTarget(sample) + " of the 8192 planned.";
  return Make("on-course", "A good guess: the plan is just enough.", std::move(sample), 8, truth);
}

Scenario NeedsMore() {
  auto sample = MakeSample("larch-extract-3", "larch extract, fraction 3", 4096, 7000);
  const std::string truth =
      ReachesTarget(sample) + "; 4096 are planned, the booking has room for 11520.";
  Scenario scenario =
      Make("needs-more", "The plan is too short, the night is not.", std::move(sample), 8, truth);
  // The operator follows the advice, so the spectrometer goes on after the plan.
  scenario.looks = EvenLooks(2 * scenario.sample.scans_planned, kLooks);
  return scenario;
}

Scenario Hopeless() {
  auto sample = MakeSample("moss-trace-1", "moss pigment, trace", 14336, 120000);
  const std::string truth = ReachesTarget(sample) + "; the booking has room for 14400.";
  return Make("hopeless", "Far too little substance in the tube.", std::move(sample), 10, truth);
}

Scenario Blank() {
  auto sample = EmptySample("moss-trace-2", "moss pigment, empty tube by mistake", 8192);
  AddSolvent(sample, 1.5);
  return Make("blank", "The tube holds nothing but solvent.", std::move(sample), 8,
              "There is no line in either window, however long one looks.");
}

Scenario TubeLeaking() {
  auto sample = MakeSample("fern-oil-1", "fern oil in a cracked tube", 8192, 4600);
  // Down to half at the end of the plan.
  sample.amplitude = [](std::uint64_t scan) {
    return std::exp2(-static_cast<double>(scan) / 8192);
  };
  return Make("tube-leaking", "The tube leaks and the signal fades all night.", std::move(sample),
              8,
              "The amplitude falls evenly, on a logarithmic scale, to 80 % at scan 2637 and to "
              "half at scan 8192.");
}

Scenario LockLost() {
  auto sample = MakeSample("fern-oil-2", "fern oil", 8192, 6000);
  sample.lock_level = [](std::uint64_t scan) { return scan <= 3000 ? 0.82 : 0.04; };
  sample.drift_hz = [](std::uint64_t scan) { return scan <= 3000 ? 0.0 : 5.0; };
  sample.extra_width_hz = [](std::uint64_t scan) { return scan <= 3000 ? 0.0 : 6.0; };
  return Make("lock-lost", "The lock is lost in the middle of the night.", std::move(sample), 8,
              "After scan 3000 the lock level is 0.04, the lines stand 5 Hz higher and are 6 Hz "
              "broader.");
}

Scenario FieldDrifting() {
  auto sample = MakeSample("fern-oil-3", "fern oil, no lock solvent", 8192, 4600);
  sample.drift_hz = [](std::uint64_t scan) { return 6.0 * static_cast<double>(scan) / 8192; };
  return Make("field-drifting", "Run without a lock while the field drifts.", std::move(sample), 8,
              "All lines move evenly, by 6 Hz over 8192 scans.");
}

Scenario CoherentSpur() {
  auto sample = MakeSample("peat-acid-1", "peat acid, fraction 1", 8192, 5000);
  InventedLine spur;
  spur.shift_ppm = 153.3;
  spur.width_hz = 0.02;
  spur.signal_to_noise_per_scan = 0.5 * sample.lines[kLimitingLine].signal_to_noise_per_scan;
  spur.phase_radians = 1.9;
  sample.spur = spur;
  return Make("coherent-spur", "A signal from outside leaks into the receiver.", std::move(sample),
              8,
              "A spur at 153.3 ppm, half as high as the limiting line, grows with the scans as a "
              "line does and never averages away.");
}

Scenario GainDoubled() {
  auto sample = MakeSample("peat-acid-2", "peat acid, fraction 2", 8192, 5000);
  sample.gain = [](std::uint64_t scan) { return scan <= 2500 ? 1.0 : 2.0; };
  return Make("gain-doubled", "Somebody doubles the receiver gain of a running experiment.",
              std::move(sample), 8,
              "After scan 2500 signal and noise are both twice as large; the export does not "
              "say so.");
}

Scenario NoiseRising() {
  auto sample = MakeSample("peat-acid-3", "peat acid, fraction 3", 8192, 4000);
  sample.noise = [](std::uint64_t scan) { return scan <= 3500 ? 1.0 : 1.6; };
  return Make("noise-rising", "A machine next door is switched on at night.", std::move(sample), 8,
              "After scan 3500 the noise of each scan is 1.6 times what it was; the signal stays.");
}

}  // namespace

const std::vector<Scenario>& Scenarios() {
  static const std::vector<Scenario> scenarios = {
      StrongSample(), OnCourse(),      NeedsMore(),    Hopeless(),    Blank(),      TubeLeaking(),
      LockLost(),     FieldDrifting(), CoherentSpur(), GainDoubled(), NoiseRising()};
  return scenarios;
}

const Scenario* FindScenario(std::string_view name) {
  const auto& all = Scenarios();
  const auto found = std::find_if(all.begin(), all.end(),
                                  [&](const Scenario& scenario) { return scenario.name == name; });
  return found == all.end() ? nullptr : &*found;
}

InventedSample StudySample(double signal_to_noise_per_scan) {
  InventedSample sample;
  sample.run = "study";
  sample.sample = "invented for a study";
  sample.spectral_width_hz = 2000;
  sample.points = 1024;
  sample.broadening_hz = 2;
  sample.phase_cycle = 1;
  sample.lines = {{101.3, 2.0, signal_to_noise_per_scan}};
  return sample;
}

}  // namespace lastscan::rehearsal
