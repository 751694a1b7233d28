#include "engine/run.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <optional>
#include <utility>

#include "engine/admission.h"
#include "engine/advice/amplitude_history.h"
#include "engine/advice/assembly.h"
#include "engine/advice/findings.h"
#include "engine/advice/goal.h"
#include "engine/advice/noise_growth.h"
#include "engine/forecast/outlook.h"
#include "engine/forecast/pace.h"
#include "engine/refusal.h"
#include "engine/saved_arrays.h"
#include "engine/sensitivity/convention.h"
#include "engine/sensitivity/noise_window.h"
#include "engine/sensitivity/survey.h"
#include "engine/settings.h"
#include "engine/spectrum/samples.h"
#include "engine/spectrum/transform.h"
#include "engine/state.pb.h"

namespace lastscan::engine {
namespace {

// rho of the mixture evidence, as a share of the first snapshot's scans: near
// its best from the first look to some hundred looks later, and fixed before
// any data are judged.
constexpr double kEvidenceShare = 0.25;
constexpr double kLeastPeak = 4;         // readings below are not looked at as lines
constexpr std::size_t kPhaseLines = 32;  // strongest lines that settle the phase
constexpr std::size_t kReferenceLines = 16;
constexpr double kReferenceStrength = 10;  // together, to start an amplitude history
constexpr double kChangeSignificance = 5;
constexpr double kStrongLine = 200;
constexpr std::size_t kOnsetPoints = 1024;
constexpr std::uint32_t kLayout = 1;

double Seconds(const google::protobuf::Timestamp& time) {
  return static_cast<double>(time.seconds()) + 1e-9 * time.nanos();
}

}  // namespace

class Run::State {
 public:
  explicit State(v1::EngineSettings settings) : settings_(std::move(settings)) {
    CheckSettings(settings_);
  }

  const v1::Advice& Admit(const v1::Snapshot& snapshot, std::string_view samples);
  const v1::Advice& advice() const { return advice_; }
  std::string Save() const;
  void Restore(const state::Run& saved);

 private:
  // What a goal asks for, worked out once and kept until it changes.
  struct Question {
    std::string key;  // serialized goal and noise window
    v1::Goal goal;
    SearchRegions regions;
    std::optional<BinRange> noise_window;
    std::uint32_t phase_cycle = 1;
  };

  Question QuestionOf(const v1::Snapshot& snapshot, const Transform& transform) const;
  std::vector<Line> Lines(ScaledSpectrum& spectrum, const MixtureEvidence& evidence,
                          std::vector<double>& curve) const;
  void SettlePhase(ScaledSpectrum& spectrum, const v1::Snapshot& snapshot,
                   std::span<const std::complex<double>> early, double point_noise,
                   const MixtureEvidence& evidence, std::vector<double>& curve,
                   std::vector<Line>& lines);
  double ScansByBookingEnd(const v1::Snapshot& snapshot, double seconds_per_scan,
                           std::string& event, bool& has_booking) const;

  v1::EngineSettings settings_;
  v1::Snapshot first_;
  v1::Snapshot latest_;
  std::optional<Transform> transform_;
  Scatter scatter_;
  NoiseEstimate noise_;
  double smallest_increment_ = 0;
  Pace pace_;
  std::optional<PhaseModel> phase_;
  Question question_;
  std::vector<bool> confirmed_windows_;
  std::uint32_t confirmed_lines_ = 0;
  AmplitudeHistory amplitude_;
  NoiseGrowth growth_;
  Findings findings_;
  v1::Advice advice_;
};

Run::State::Question Run::State::QuestionOf(const v1::Snapshot& snapshot,
                                            const Transform& transform) const {
  const v1::NucleusDefaults defaults = DefaultsFor(settings_, snapshot.nucleus());
  Question question;
  question.goal = CompletedGoal(snapshot.goal(), defaults.goal());
  question.phase_cycle =
      std::max({snapshot.phase_cycle() > 0 ? snapshot.phase_cycle() : defaults.phase_cycle(), 1u});
  const v1::ShiftRange* window = snapshot.has_noise_window()   ? &snapshot.noise_window()
                                 : defaults.has_noise_window() ? &defaults.noise_window()
                                                               : nullptr;
  question.key = question.goal.SerializeAsString() + '\n';
  if (window != nullptr) question.key += window->SerializeAsString();
  if (question.key == question_.key) {
    question.regions = question_.regions;
    question.noise_window = question_.noise_window;
    return question;
  }
  CheckGoal(question.goal, "the goal of run '" + snapshot.run() + "'");
  question.regions = RegionsOf(question.goal, snapshot.nucleus(), transform.axis());
  if (window != nullptr) question.noise_window = NoiseWindowBins(*window, transform);
  return question;
}

std::vector<Line> Run::State::Lines(ScaledSpectrum& spectrum, const MixtureEvidence& evidence,
                                    std::vector<double>& curve) const {
  curve = ReadingCurve(spectrum);
  return ReadLines(spectrum, curve, FindPeaks(curve, kLeastPeak), evidence);
}

// Lines are read with the phase known so far; once they settle it for the first
// time they are read again with it.
void Run::State::SettlePhase(ScaledSpectrum& spectrum, const v1::Snapshot& snapshot,
                             std::span<const std::complex<double>> early, double point_noise,
                             const MixtureEvidence& evidence, std::vector<double>& curve,
                             std::vector<Line>& lines) {
  spectrum.phase = phase_;
  lines = Lines(spectrum, evidence, curve);
  if (!spectrum.complex) return;
  const double sure =
      std::log(static_cast<double>(spectrum.axis.bins) / settings_.false_confirmation());
  const auto phases_of = [&] {
    std::vector<LinePhase> phases;
    for (const Line& line : lines) {
      if (line.log_evidence < sure || phases.size() == kPhaseLines) continue;
      phases.push_back(PhaseOf(spectrum, line));
    }
    return phases;
  };
  std::vector<LinePhase> phases = phases_of();
  std::optional<double> given;
  if (snapshot.has_receiver_delay_points()) given = snapshot.receiver_delay_points();
  const auto fitted = FitPhase(spectrum.axis, phases, given, OnsetOfFid(early, point_noise));
  if (fitted && !phase_) {
    spectrum.phase = fitted;
    lines = Lines(spectrum, evidence, curve);
    phases = phases_of();
  }
  if (fitted) phase_ = fitted;
  if (!spectrum.phase) return;
  ApplyPhase(*spectrum.phase, phases, lines);
}

double Run::State::ScansByBookingEnd(const v1::Snapshot& snapshot, double seconds_per_scan,
                                     std::string& event, bool& has_booking) const {
  const double now = Seconds(snapshot.recorded_at());
  double end = std::numeric_limits<double>::infinity();
  if (snapshot.has_booking_end()) end = Seconds(snapshot.booking_end());
  for (const v1::SiteEvent& site : settings_.events()) {
    const double begins = Seconds(site.begins_at());
    const bool ours = site.instrument().empty() || site.instrument() == snapshot.instrument();
    if (ours && begins > now && begins < end) {
      end = begins;
      event = site.what();
    }
  }
  const double scans = static_cast<double>(snapshot.scans_done());
  has_booking = std::isfinite(end) && seconds_per_scan > 0;
  if (has_booking) return scans + std::floor(std::max(end - now, 0.0) / seconds_per_scan);
  if (snapshot.scans_planned() == 0) return std::numeric_limits<double>::infinity();
  return std::max(scans,
                  static_cast<double>(snapshot.scans_planned()) * settings_.longest_extension());
}

const v1::Advice& Run::State::Admit(const v1::Snapshot& snapshot, std::string_view samples) {
  // Can it be true? Nothing is changed before all of this has passed.
  CheckSnapshot(snapshot, samples.size());
  const bool begins = !transform_.has_value();
  if (!begins) CheckContinues(latest_, snapshot);
  const double broadening =
      CompletedGoal(snapshot.goal(), DefaultsFor(settings_, snapshot.nucleus()).goal())
          .broadening_hz();
  if (!begins) CheckBroadening(question_.goal.broadening_hz(), broadening, snapshot);
  std::optional<Transform> fresh;
  if (begins) fresh.emplace(snapshot, broadening);
  const Transform& transform = begins ? *fresh : *transform_;
  Question question = QuestionOf(snapshot, transform);
  std::vector<std::complex<double>> summed = SummedSamples(snapshot, samples);

  // Spectrum; with the first snapshot the FID's own noise too.
  const double scans = static_cast<double>(snapshot.scans_done());
  const bool complex = transform.complex();
  NoiseEstimate single;
  if (begins && complex) {
    single = NoiseOfFid(summed, scans);
    single.per_scan *= transform.noise_gain();
  }
  const std::vector<std::complex<double>> early(
      summed.begin(),
      summed.begin() + static_cast<std::ptrdiff_t>(std::min(summed.size(), kOnsetPoints)));
  const std::vector<std::complex<double>> spectrum = transform.Apply(std::move(summed));
  const double fill = transform.fill_ratio();
  const double independent = transform.independent_bins();

  // From here on the snapshot is taken.
  if (begins) {
    transform_ = std::move(fresh);
    first_ = snapshot;
  }
  const double scans_before = scatter_.scans();
  const double increment = scans - scans_before;
  smallest_increment_ = begins ? increment : std::min(smallest_increment_, increment);
  if (question.key != question_.key) {  // another goal: nothing said of the old one holds
    confirmed_windows_.clear();
    confirmed_lines_ = 0;
    advice_.clear_verdict();
  }
  question_ = std::move(question);
  pace_.Add(Seconds(snapshot.recorded_at()), scans);

  // Noise, from increments once there are two.
  Observations seen;
  seen.scans_before = scans_before;
  seen.scans = scans;
  seen.noise_before = noise_;
  if (amplitude_.started()) {
    seen.relative_amplitude = amplitude_.Add(scatter_.sum(), spectrum, scans_before, scans);
    seen.amplitude_deviation = amplitude_.DeviationOf(increment);
    seen.amplitude_change = amplitude_.Change(kChangeSignificance);
  }
  seen.noise_of_increment = scatter_.Add(spectrum, scans, noise_.per_scan, complex, fill);
  seen.deviation_of_increment = RelativeDeviationOfMedian(complex ? 2 : 1, independent);
  if (scatter_.increments() >= 2) {
    noise_ = scatter_.Estimate(complex, fill, independent);
  } else {
    noise_ = single.per_scan > 0 ? single
                                 : NoiseOfQuietBands(spectrum, scans, complex, fill, independent);
  }
  // Digital silence has no noise to compare with; one count stands in for it.
  if (!(noise_.per_scan > 0)) noise_.per_scan = 1 / std::sqrt(scans);
  seen.noise = noise_;

  // Lines, and what the goal's windows read.
  ScaledSpectrum scaled;
  scaled.axis = transform.axis();
  scaled.bins = spectrum;
  scaled.unit = noise_.per_scan * std::sqrt(scans);
  scaled.fill_ratio = fill;
  scaled.acquisition_seconds = transform.acquisition_seconds();
  scaled.complex = complex;
  const MixtureEvidence evidence(scans, kEvidenceShare * static_cast<double>(first_.scans_done()),
                                 scaled.quadratures());
  std::vector<double> curve;
  std::vector<Line> lines;
  SettlePhase(scaled, snapshot, early, scaled.unit / transform.noise_gain(), evidence, curve,
              lines);

  NoiseWindowReading window{1, 0, 0};
  if (question_.noise_window) {
    window = ReadNoiseWindow(spectrum, *question_.noise_window, transform, scaled.unit);
    seen.window_excess = window.excess;
    seen.window_deviation = window.relative_deviation;
  }
  SurveyOptions options;
  options.windows = &question_.regions.windows;
  options.everywhere = &question_.regions.everywhere;
  options.lines_wanted = question_.goal.kind() == v1::LINE_COUNT ? question_.goal.lines() : 0;
  options.false_confirmation = settings_.false_confirmation();
  options.noise_deviation =
      question_.noise_window ? window.relative_deviation : noise_.relative_deviation;
  options.confirmed_windows = confirmed_windows_;
  options.confirmed_lines = confirmed_lines_;
  const Survey survey = LookAt(scaled, curve, lines, options);
  confirmed_windows_ = survey.confirmed_windows;
  confirmed_lines_ = survey.confirmed_lines;

  // Forecast.
  seen.seconds_per_scan = pace_.SecondsPerScan();
  if (seen.seconds_per_scan == 0) seen.seconds_per_scan = snapshot.seconds_per_scan();
  Matter matter;
  matter.factor = ConventionFactor(question_.goal.convention(),
                                   question_.noise_window ? window.points : kUsualNoisePoints) /
                  window.excess;
  Case& facts = matter.facts;
  facts.previous = advice_.verdict();
  facts.scans = scans;
  facts.planned = static_cast<double>(snapshot.scans_planned());
  facts.booked =
      ScansByBookingEnd(snapshot, seen.seconds_per_scan, matter.limiting_event, facts.has_booking);
  facts.phase_cycle = question_.phase_cycle;
  facts.out_of_reach_chance = settings_.out_of_reach_chance();
  facts.final = snapshot.final();
  OutlookQuestion ahead;
  ahead.scans = scans;
  ahead.planned = facts.planned;
  ahead.booked = facts.booked;
  ahead.target = question_.goal.target() / matter.factor;
  ahead.tolerance = question_.goal.tolerance();
  ahead.assurance = question_.goal.assurance();
  ahead.looks = scans / smallest_increment_;
  facts.outlook = LookAhead(survey, ahead);

  // Findings and advice.
  if (growth_.Wants(scans)) {
    const NoiseEstimate quiet = NoiseOfQuietBands(spectrum, 1, complex, fill, independent);
    growth_.Add(scans, quiet.per_scan, quiet.relative_deviation);
  }
  seen.noise_growth = growth_.Exponent();
  seen.strong_lines = survey.strongest > kStrongLine;
  matter.findings = findings_.Look(snapshot, seen);
  matter.snapshot = &snapshot;
  matter.goal = &question_.goal;
  matter.survey = &survey;
  matter.axis = &transform.axis();
  matter.acquisition_seconds = transform.acquisition_seconds();
  matter.seconds_per_scan = seen.seconds_per_scan;
  matter.noise_per_scan = noise_.per_scan;
  matter.noise_growth = seen.noise_growth;
  matter.window_excess = window.excess;
  advice_ = Assemble(matter);

  if (!amplitude_.started()) {
    std::vector<std::ptrdiff_t> bins;
    double strength = 0;
    for (const SurveyedLine& line : survey.lines) {
      if (bins.size() == kReferenceLines) break;
      bins.push_back(line.line.nearest_bin);
      strength += line.line.height * line.line.height;
    }
    if (strength >= kReferenceStrength * kReferenceStrength) {
      amplitude_.Start(bins, spectrum, scans, noise_.per_scan, scaled.quadratures());
    }
  }
  latest_ = snapshot;
  return advice_;
}

std::string Run::State::Save() const {
  state::Run saved;
  saved.set_layout(kLayout);
  *saved.mutable_first() = first_;
  *saved.mutable_latest() = latest_;
  SaveArrays(scatter_, saved);
  saved.set_noise_per_scan(noise_.per_scan);
  saved.set_noise_relative_deviation(noise_.relative_deviation);
  saved.set_noise_from_increments(noise_.from_increments);
  saved.set_smallest_increment(smallest_increment_);
  for (double interval : pace_.intervals()) saved.add_intervals(interval);
  saved.set_last_seconds(pace_.last_seconds());
  saved.set_last_scans(pace_.last_scans());
  if (phase_) {
    saved.mutable_phase()->set_constant_radians(phase_->constant_radians);
    saved.mutable_phase()->set_delay_points(phase_->delay_points);
    saved.mutable_phase()->set_radians_per_bin(phase_->radians_per_bin);
    saved.mutable_phase()->set_middle_bin(phase_->middle_bin);
  }
  for (bool confirmed : confirmed_windows_) saved.add_confirmed_windows(confirmed);
  saved.set_confirmed_lines(confirmed_lines_);
  amplitude_.SaveTo(saved);
  growth_.SaveTo(saved);
  findings_.SaveTo(saved);
  *saved.mutable_advice() = advice_;
  return Sealed(saved.SerializeAsString());
}

void Run::State::Restore(const state::Run& saved) {
  if (saved.layout() != kLayout) {
    throw Refusal("the saved run is of layout " + std::to_string(saved.layout()) +
                  ", this engine reads layout " + std::to_string(kLayout) +
                  ": use the version that wrote it");
  }
  if (!saved.has_latest() || saved.latest().scans_done() == 0) return;  // saved before a snapshot
  first_ = saved.first();
  latest_ = saved.latest();
  const v1::NucleusDefaults defaults = DefaultsFor(settings_, latest_.nucleus());
  const Transform transform(first_, saved.advice().goal().broadening_hz());
  RestoreArrays(saved, static_cast<std::size_t>(transform.axis().bins), scatter_);
  noise_ = {saved.noise_per_scan(), saved.noise_relative_deviation(),
            saved.noise_from_increments()};
  smallest_increment_ = saved.smallest_increment();
  pace_.Restore({saved.intervals().begin(), saved.intervals().end()}, saved.last_seconds(),
                saved.last_scans());
  if (saved.has_phase()) {
    phase_ = PhaseModel{saved.phase().constant_radians(), saved.phase().delay_points(),
                        saved.phase().radians_per_bin(),
                        static_cast<std::ptrdiff_t>(saved.phase().middle_bin())};
  }
  confirmed_windows_.assign(saved.confirmed_windows().begin(), saved.confirmed_windows().end());
  confirmed_lines_ = saved.confirmed_lines();
  amplitude_.RestoreFrom(saved);
  growth_.RestoreFrom(saved);
  findings_.RestoreFrom(saved);
  advice_ = saved.advice();
  question_ = QuestionOf(latest_, transform);
  if (question_.goal.SerializeAsString() != advice_.goal().SerializeAsString()) {
    // The settings have changed in between. What was confirmed, and the spectra
    // that were added up, are of the goal before: the next snapshot meets that.
    question_.goal = advice_.goal();
    question_.key.clear();
  }
  transform_.emplace(transform);
}

Run::Run(v1::EngineSettings settings) : state_(std::make_unique<State>(std::move(settings))) {}
Run::~Run() = default;
Run::Run(Run&&) noexcept = default;
Run& Run::operator=(Run&&) noexcept = default;

const v1::Advice& Run::Admit(const v1::Snapshot& snapshot, std::string_view samples) {
  return state_->Admit(snapshot, samples);
}

const v1::Advice& Run::advice() const { return state_->advice(); }

std::string Run::Save() const { return state_->Save(); }

Run Run::Load(v1::EngineSettings settings, std::string_view state) {
  state::Run saved;
  const std::string_view message = Unsealed(state);
  if (!saved.ParseFromArray(message.data(), static_cast<int>(message.size()))) {
    throw Refusal("the saved run cannot be read: send its snapshots again under a new run name");
  }
  Run run(std::move(settings));
  run.state_->Restore(saved);
  return run;
}

}  // namespace lastscan::engine
