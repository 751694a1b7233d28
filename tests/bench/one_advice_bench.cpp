// One advice from samples in memory against one transform of the zero-filled
// length by the same library: the ratio is what we promise, not the time.
//   build/lastscan_bench --benchmark_filter=Advice

#include <benchmark/benchmark.h>

#include <bit>
#include <complex>
#include <unsupported/Eigen/FFT>
#include <vector>

#include "engine/run.h"
#include "rehearsal/invented_run.h"
#include "rehearsal/scenarios.h"

namespace lastscan {
namespace {

// Snapshots of an ordinary night with this many complex points, made once.
std::vector<formats::Recording> Snapshots(std::uint32_t points, int count) {
  rehearsal::Scenario night = *rehearsal::FindScenario("on-course");
  night.sample.points = points;
  night.sample.rounded = false;
  rehearsal::InventedRun run(night.sample, 1);
  std::vector<formats::Recording> snapshots;
  for (int look = 1; look <= count; ++look) {
    snapshots.push_back(run.AdvanceTo(static_cast<std::uint64_t>(look) * 128));
    *snapshots.back().snapshot.mutable_goal() = night.goal;
  }
  return snapshots;
}

void OneTransform(benchmark::State& state) {
  const std::size_t bins = std::bit_ceil(2 * static_cast<std::size_t>(state.range(0)));
  std::vector<std::complex<double>> in(bins, 1);
  std::vector<std::complex<double>> out(bins);
  Eigen::FFT<double> fft;
  fft.fwd(out.data(), in.data(), static_cast<Eigen::Index>(bins));
  for (auto _ : state) {
    fft.fwd(out.data(), in.data(), static_cast<Eigen::Index>(bins));
    benchmark::DoNotOptimize(out.data());
  }
}

// The 20th snapshot and on, 12 of them a round: lines confirmed, phase known.
void OneAdvice(benchmark::State& state) {
  constexpr int kBefore = 20;
  constexpr int kTimed = 12;
  const auto snapshots = Snapshots(static_cast<std::uint32_t>(state.range(0)), kBefore + kTimed);
  engine::Run run(engine::DefaultSettings());
  for (int i = 0; i < kBefore; ++i) {
    run.Admit(snapshots[i].snapshot, formats::AsFrame(snapshots[i].samples));
  }
  const std::string saved = run.Save();
  int next = kBefore + kTimed;
  for (auto _ : state) {
    if (next == kBefore + kTimed) {
      state.PauseTiming();
      run = engine::Run::Load(engine::DefaultSettings(), saved);
      next = kBefore;
      state.ResumeTiming();
    }
    benchmark::DoNotOptimize(
        run.Admit(snapshots[next].snapshot, formats::AsFrame(snapshots[next].samples)));
    ++next;
  }
  state.counters["state_MiB"] = static_cast<double>(saved.size()) / (1 << 20);
}

BENCHMARK(OneTransform)->Arg(16384)->Arg(65536)->Arg(131072)->Unit(benchmark::kMillisecond);
BENCHMARK(OneAdvice)->Arg(16384)->Arg(65536)->Arg(131072)->Unit(benchmark::kMillisecond);

}  // namespace
}  // namespace lastscan
