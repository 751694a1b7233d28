// A bench for tests of the daemon's answers: real engine, real ledger in a folder
// of its own, clocks that are set by hand, and snapshots of an invented run.
#pragma once

#include <gtest/gtest.h>

#include <filesystem>
#include <memory>
#include <string>
#include <string_view>
#include <vector>

#include "engine/run.h"
#include "formats/recording.h"
#include "lastscan/v1/service.pb.h"
#include "ledger/ledger.h"
#include "rehearsal/invented_run.h"
#include "rehearsal/scenarios.h"
#include "service/requests.h"
#include "service/settings_file.h"

namespace lastscan::service {

class RequestBench : public ::testing::Test {
 protected:
  void SetUp() override {
    std::string name = ::testing::TempDir() + "/requests-XXXXXX";
    ASSERT_NE(::mkdtemp(name.data()), nullptr);
    folder_ = name;
    settings_ = EmbeddedSettings();
    settings_.set_ledger_path((folder_ / "ledger.sqlite").string());
    Start();
  }
  void TearDown() override {
    Stop();
    std::filesystem::remove_all(folder_);
  }

  void Start() {
    book_ = std::make_unique<ledger::Ledger>(settings_.ledger_path());
    requests_ = std::make_unique<Requests>(
        settings_, *book_, Clocks{[this] { return wall_; }, [this] { return steady_; }},
        [this](const v1::Advice& advice) { broadcasts_.push_back(advice); });
  }
  void Stop() {
    requests_.reset();
    book_.reset();
  }
  void Restart() {
    Stop();
    Start();
  }

  // A recording of a small invented sample, with this goal for all.
  static rehearsal::InventedSample Sample(const std::string& run) {
    rehearsal::InventedSample sample = rehearsal::StudySample(1.5);
    sample.run = run;
    sample.scans_planned = 4096;
    return sample;
  }

  v1::Reply Send(const v1::Snapshot& snapshot, std::string_view samples) {
    v1::Request request;
    *request.mutable_snapshot() = snapshot;
    const std::string message = request.SerializeAsString();
    return requests_->Answer({message, samples});
  }
  v1::Reply Send(const formats::Recording& recording) {
    return Send(recording.snapshot, formats::AsFrame(recording.samples));
  }
  v1::Reply Ask(const v1::Request& request) {
    const std::string message = request.SerializeAsString();
    return requests_->Answer({message});
  }
  v1::Reply Show(const std::string& run, unsigned history = 0) {
    v1::Request request;
    request.mutable_show_run()->set_run(run);
    request.mutable_show_run()->set_history(history);
    return Ask(request);
  }
  v1::Reply List(bool active_only) {
    v1::Request request;
    request.mutable_list_runs()->set_active_only(active_only);
    return Ask(request);
  }
  void Pass(double seconds) {
    wall_ += seconds;
    steady_ += seconds;
  }

  std::filesystem::path folder_;
  v1::Settings settings_;
  double wall_ = 1'900'000'000;
  double steady_ = 1000;
  std::vector<v1::Advice> broadcasts_;
  std::unique_ptr<ledger::Ledger> book_;
  std::unique_ptr<Requests> requests_;
};

}  // namespace lastscan::service
