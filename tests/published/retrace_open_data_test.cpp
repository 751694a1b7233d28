// The main job on real input: finished accumulations of the open data, retraced
// through the real daemon and its socket, or assessed by the client alone, end
// in ENOUGH, and the final reading is that of an independent computation on the
// same file (independent_reading.py) within 3 %.
#include <google/protobuf/util/json_util.h>
#include <gtest/gtest.h>

#include <csignal>
#include <cstdlib>
#include <sstream>
#include <string>
#include <vector>

#include "lastscan/v1/advice.pb.h"
#include "published/script.h"
#include "service/client_bench.h"

namespace lastscan::published {
namespace {

constexpr char kCarbon[] = "Rutin_3080ug200uL_DMSOd6_13CNMR_400MHz_JDX.jdx";

struct Independent {
  double ratio = 0;
  double shift_ppm = 0;
};

Independent ReadIndependently(const std::vector<std::string>& arguments) {
  std::istringstream output(OutputOf("independent_reading.py", arguments));
  Independent reading;
  output >> reading.ratio >> reading.shift_ppm;
  EXPECT_TRUE(output) << "independent_reading.py printed no numbers";
  return reading;
}

class RetraceOpenData : public testing::ClientBench {
 protected:
  void SetUp() override {
    const char* folder = std::getenv("LASTSCAN_OPEN_DATA");
    ASSERT_NE(folder, nullptr) << "LASTSCAN_OPEN_DATA is not set: run tests/published/open_data.sh "
                                  "FOLDER and set it to that folder";
    data_ = folder;
    ClientBench::SetUp();
  }
  void TearDown() override {
    if (!folder_.empty()) ClientBench::TearDown();
  }

  std::string Data(const std::string& name) const { return data_ + "/" + name; }

  // What the client prints as JSON Lines, one advice a look.
  std::vector<v1::Advice> Advices(const std::vector<std::string>& arguments) {
    const testing::Finished finished = Client(arguments);
    EXPECT_EQ(finished.code, 0) << finished.err;
    std::vector<v1::Advice> all;
    std::istringstream lines(finished.out);
    std::string line;
    while (std::getline(lines, line)) {
      const auto status = google::protobuf::util::JsonStringToMessage(line, &all.emplace_back());
      EXPECT_TRUE(status.ok()) << status.ToString() << "\n" << line;
    }
    return all;
  }

  std::string data_;
};

void ExpectAgreement(const v1::Advice& last, const Independent& independent) {
  EXPECT_EQ(last.verdict(), v1::ENOUGH) << last.because();
  EXPECT_TRUE(last.limiting_line().confirmed());
  EXPECT_NEAR(last.limiting_line().shift_ppm(), independent.shift_ppm, 0.01);
  EXPECT_NEAR(last.signal_to_noise().estimate() / independent.ratio, 1, 0.03)
      << "ours " << last.signal_to_noise().estimate() << ", independently " << independent.ratio;
  EXPECT_GT(last.cautions_size(), 0);
}

// Proton FIDs: 32 looks through the daemon.
class ProtonFids : public RetraceOpenData, public ::testing::WithParamInterface<const char*> {};

TEST_P(ProtonFids, EndInEnoughThroughTheDaemon) {
  testing::Running daemon = StartDaemon();
  const std::vector<v1::Advice> all =
      Advices({"retrace", Data(GetParam()), "--feed", "--json", "--looks", "32"});
  ASSERT_EQ(all.size(), 32u);
  ExpectAgreement(all.back(), ReadIndependently({Data(GetParam()), "0.3"}));
  // A line that strong is enough at once, and the advice does not waver.
  for (const v1::Advice& advice : all) EXPECT_EQ(advice.verdict(), v1::ENOUGH) << advice.because();
  // The daemon keeps what it said: the same advice, asked again.
  const std::vector<v1::Advice> kept = Advices({"show", all.back().run(), "--json"});
  ASSERT_EQ(kept.size(), 1u);
  EXPECT_EQ(kept.back().SerializeAsString(), all.back().SerializeAsString());
  EXPECT_EQ(daemon.Stop(SIGTERM).code, 0);
}

INSTANTIATE_TEST_SUITE_P(OpenData, ProtonFids,
                         ::testing::Values("aspirin-1h.fid.dx", "naphtoicAcid-1h.fid.dx"),
                         [](const auto& info) { return std::string(info.param).substr(0, 7); });

// The carbon-13 spectrum came of 4,096 scans, as its title says; it has no label
// for them. Its strongest line is the solvent's.
TEST_F(RetraceOpenData, CarbonSpectrumEndsInEnough) {
  const std::vector<std::string> options = {Data(kCarbon), "--scans-done", "4096",
                                            "--solvent",   "none",         "--json"};
  const Independent independent = ReadIndependently({Data(kCarbon), "1"});
  for (const std::string command : {"assess", "retrace"}) {
    SCOPED_TRACE(command);
    std::vector<std::string> arguments = options;
    arguments.insert(arguments.begin(), command);
    const std::vector<v1::Advice> all = Advices(arguments);
    ASSERT_EQ(all.size(), command == "assess" ? 1u : 32u);
    ExpectAgreement(all.back(), independent);
  }
}

// With the solvent's lines left out, the sample's own strongest line.
TEST_F(RetraceOpenData, CarbonSpectrumWithoutItsSolvent) {
  const Independent independent = ReadIndependently({Data(kCarbon), "1", "38.32:40.72"});
  const std::vector<v1::Advice> all =
      Advices({"retrace", Data(kCarbon), "--scans-done", "4096", "--json"});
  ASSERT_EQ(all.size(), 32u);
  EXPECT_LT(independent.ratio, 20);
  ExpectAgreement(all.back(), independent);
  // So weak a line is not enough from the start.
  EXPECT_NE(all.front().verdict(), v1::ENOUGH) << all.front().because();
}

}  // namespace
}  // namespace lastscan::published
