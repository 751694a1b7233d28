// What the daemon answers: snapshots taken, repeated, refused or failed, questions,
// silence; and that nothing changes when something goes wrong.
#include "service/requests.h"

#include <SQLiteCpp/Database.h>
#include <google/protobuf/util/message_differencer.h>

#include <cmath>
#include <limits>

#include "request_bench.h"

namespace lastscan::service {
namespace {

using google::protobuf::util::MessageDifferencer;

class RequestsTest : public RequestBench {};

bool Mentions(const v1::Reply& reply, const std::string& what) {
  return reply.reason().find(what) != std::string::npos &&
         reply.reason().find('\n') == std::string::npos;
}

// What an uninterrupted engine says, with no daemon around it.
std::vector<v1::Advice> Uninterrupted(const v1::Settings& settings,
                                      const std::vector<formats::Recording>& recordings) {
  engine::Run run(settings.engine());
  std::vector<v1::Advice> advices;
  for (const formats::Recording& recording : recordings) {
    advices.push_back(run.Admit(recording.snapshot, formats::AsFrame(recording.samples)));
  }
  return advices;
}

std::vector<formats::Recording> Night(rehearsal::InventedSample sample, int looks) {
  rehearsal::InventedRun run(std::move(sample), 7);
  std::vector<formats::Recording> recordings;
  for (int look = 1; look <= looks; ++look) {
    recordings.push_back(run.AdvanceTo(static_cast<std::uint64_t>(8 * look)));
  }
  return recordings;
}

TEST_F(RequestsTest, AcceptsCommitsBroadcasts) {
  const auto night = Night(Sample("a"), 3);
  const auto expected = Uninterrupted(settings_, night);
  for (std::size_t i = 0; i < night.size(); ++i) {
    const v1::Reply reply = Send(night[i]);
    EXPECT_EQ(reply.outcome(), v1::ACCEPTED) << reply.reason();
    EXPECT_TRUE(MessageDifferencer::Equals(reply.advice(), expected[i]));
    EXPECT_FALSE(reply.advice().cautions().empty());
    EXPECT_FALSE(reply.version().empty());
    EXPECT_EQ(reply.broadcast_endpoint(), settings_.service().broadcast_endpoint());
    ASSERT_EQ(broadcasts_.size(), i + 1);
    EXPECT_TRUE(MessageDifferencer::Equals(broadcasts_[i], expected[i]));
    EXPECT_TRUE(MessageDifferencer::Equals(*book_->LatestAdvice("a"), expected[i]));
  }
}

TEST_F(RequestsTest, ARepeatedSnapshotGetsTheAdviceGivenThenAndChangesNothing) {
  const auto night = Night(Sample("a"), 4);
  std::vector<v1::Advice> given;
  for (const auto& recording : night) given.push_back(Send(recording).advice());
  const v1::RunRecord before = *book_->Record("a");
  broadcasts_.clear();
  for (const bool restarted : {false, true}) {
    if (restarted) Restart();
    for (const std::size_t i : {3U, 0U, 2U}) {
      const v1::Reply reply = Send(night[i]);
      EXPECT_EQ(reply.outcome(), v1::REPEATED) << reply.reason();
      EXPECT_TRUE(MessageDifferencer::Equals(reply.advice(), given[i]));
    }
  }
  EXPECT_TRUE(broadcasts_.empty());
  EXPECT_TRUE(MessageDifferencer::Equals(*book_->Record("a"), before));
}

TEST_F(RequestsTest, ARepeatIsKnownEvenWithoutATimeOfItsOwn) {
  auto night = Night(Sample("a"), 1);
  night[0].snapshot.clear_recorded_at();
  const v1::Reply first = Send(night[0]);
  EXPECT_EQ(first.outcome(), v1::ACCEPTED) << first.reason();
  EXPECT_EQ(first.advice().issued_at().seconds(), 1'900'000'000);
  Pass(60);
  EXPECT_EQ(Send(night[0]).outcome(), v1::REPEATED);
}

TEST_F(RequestsTest, ARestartInBetweenChangesNoAdvice) {
  const auto night = Night(Sample("a"), 8);
  const auto expected = Uninterrupted(settings_, night);
  for (std::size_t i = 0; i < night.size(); ++i) {
    if (i % 2 == 1) Restart();
    EXPECT_TRUE(MessageDifferencer::Equals(Send(night[i]).advice(), expected[i])) << i;
  }
  EXPECT_EQ(book_->Record("a")->snapshots(), 8U);
}

TEST_F(RequestsTest, RunsBeyondThoseInMemoryComeBackFromTheLedger) {
  settings_.mutable_service()->set_most_active_runs(2);
  Restart();
  std::vector<std::vector<formats::Recording>> nights;
  std::vector<std::vector<v1::Advice>> expected;
  for (const char* run : {"a", "b", "c"}) {
    nights.push_back(Night(Sample(run), 4));
    expected.push_back(Uninterrupted(settings_, nights.back()));
  }
  for (std::size_t i = 0; i < 4; ++i) {
    for (std::size_t run = 0; run < nights.size(); ++run) {
      EXPECT_TRUE(MessageDifferencer::Equals(Send(nights[run][i]).advice(), expected[run][i]));
    }
  }
}

TEST_F(RequestsTest, RefusalsSayWhyAndChangeNothing) {
  const auto night = Night(Sample("a"), 4);
  const auto expected = Uninterrupted(settings_, night);
  Send(night[0]);
  Send(night[1]);
  const v1::RunRecord before = *book_->Record("a");
  const auto refuse = [&](const formats::Recording& recording, const std::string& why) {
    const v1::Reply reply = Send(recording);
    EXPECT_EQ(reply.outcome(), v1::REFUSED) << why;
    EXPECT_TRUE(Mentions(reply, why)) << reply.reason();
  };
  formats::Recording bad = night[0];
  bad.samples[0] += 1;  // not a repeat, and not after the second one either
  refuse(bad, "scans");
  bad = night[2];
  bad.samples[17] = std::numeric_limits<double>::quiet_NaN();
  refuse(bad, "finite");
  bad = night[2];
  bad.samples[17] = std::numeric_limits<double>::infinity();
  refuse(bad, "finite");
  bad = night[2];
  bad.samples.pop_back();
  refuse(bad, "bytes");
  bad = night[2];
  bad.snapshot.set_points(bad.snapshot.points() / 2);
  bad.samples.resize(bad.samples.size() / 2);
  refuse(bad, "points");
  bad = night[2];
  bad.snapshot.set_spectral_width_hz(bad.snapshot.spectral_width_hz() * 2);
  refuse(bad, "spectral width");
  bad = night[2];
  bad.snapshot.set_nucleus("1H");
  refuse(bad, "");
  bad = night[2];
  bad.snapshot.set_instrument("bench-2");
  refuse(bad, "instrument");
  bad = night[2];
  bad.snapshot.set_sample("another one");
  refuse(bad, "another sample");
  bad = night[2];
  bad.snapshot.set_run("");
  refuse(bad, "names no run");
  bad = night[2];
  bad.snapshot.set_instrument("");
  refuse(bad, "names no instrument");
  bad = night[2];
  bad.snapshot.set_run("a\x1b[2J");
  refuse(bad, "control character");
  bad = night[2];
  bad.snapshot.set_sample(std::string(201, 'x'));
  refuse(bad, "201 bytes");
  bad = night[2];
  bad.snapshot.set_points(settings_.service().most_points() + 1);
  refuse(bad, "most_points");
  bad = night[2];
  bad.snapshot.set_scans_done(std::uint64_t{1} << 60);
  refuse(bad, "number of scans");
  bad = night[2];
  bad.snapshot.mutable_recorded_at()->set_seconds(std::int64_t{1} << 60);
  refuse(bad, "recorded_at");
  bad = night[2];
  bad.snapshot.mutable_booking_end()->set_nanos(-1);
  refuse(bad, "booking_end");
  EXPECT_TRUE(MessageDifferencer::Equals(*book_->Record("a"), before));
  EXPECT_EQ(broadcasts_.size(), 2U);
  // The run goes on as if nothing had been.
  EXPECT_TRUE(MessageDifferencer::Equals(Send(night[2]).advice(), expected[2]));
  EXPECT_TRUE(MessageDifferencer::Equals(Send(night[3]).advice(), expected[3]));
}

TEST_F(RequestsTest, ARefusedFirstSnapshotLeavesNoRun) {
  auto night = Night(Sample("a"), 1);
  night[0].samples[0] = std::nan("");
  EXPECT_EQ(Send(night[0]).outcome(), v1::REFUSED);
  EXPECT_FALSE(book_->Record("a"));
  EXPECT_EQ(List(false).runs_size(), 0);
}

TEST_F(RequestsTest, GarbageIsRefusedInWords) {
  v1::Request request;
  *request.mutable_snapshot() = Night(Sample("a"), 1)[0].snapshot;
  const std::string snapshot = request.SerializeAsString();
  request.mutable_ping();
  const std::string ping = request.SerializeAsString();
  const std::string empty;
  const std::string noise(1000, '\xff');
  const std::string large(settings_.service().largest_message_bytes() + 1, '\0');
  const std::vector<std::vector<std::string_view>> requests = {
      {},
      {empty},
      {noise},
      {noise, noise},
      {snapshot},
      {ping, noise},
      {large},
      {snapshot, large},
      {snapshot, noise, noise},
      {snapshot, empty},
      {std::string_view(snapshot).substr(0, snapshot.size() - 3), noise}};
  for (const auto& frames : requests) {
    const v1::Reply reply = requests_->Answer(frames);
    EXPECT_EQ(reply.outcome(), v1::REFUSED);
    EXPECT_FALSE(reply.reason().empty());
    EXPECT_EQ(reply.reason().find('\n'), std::string::npos);
  }
  EXPECT_EQ(requests_->Answer({ping}).outcome(), v1::ANSWERED);
}

TEST_F(RequestsTest, AFailedCommitLeavesTheRunAsItWas) {
  const auto night = Night(Sample("a"), 3);
  const auto expected = Uninterrupted(settings_, night);
  Send(night[0]);
  {
    SQLite::Database other(settings_.ledger_path(), SQLite::OPEN_READWRITE);
    other.exec("BEGIN IMMEDIATE");
    const v1::Reply reply = Send(night[1]);
    EXPECT_EQ(reply.outcome(), v1::FAILED);
    EXPECT_TRUE(Mentions(reply, settings_.ledger_path())) << reply.reason();
    EXPECT_FALSE(reply.has_advice());
  }
  EXPECT_EQ(broadcasts_.size(), 1U);
  const v1::Reply again = Send(night[1]);
  EXPECT_EQ(again.outcome(), v1::ACCEPTED) << again.reason();
  EXPECT_TRUE(MessageDifferencer::Equals(again.advice(), expected[1]));
  EXPECT_TRUE(MessageDifferencer::Equals(Send(night[2]).advice(), expected[2]));
  EXPECT_EQ(book_->Record("a")->snapshots(), 3U);
}

TEST_F(RequestsTest, ARunWhoseDataAreGoneSaysSo) {
  const auto night = Night(Sample("a"), 2);
  Send(night[0]);
  Stop();
  {
    ledger::Ledger book(settings_.ledger_path());
    EXPECT_EQ(book.DropStates(wall_ + 1), 1);
  }
  Start();
  EXPECT_EQ(Send(night[0]).outcome(), v1::REPEATED);
  const v1::Reply reply = Send(night[1]);
  EXPECT_EQ(reply.outcome(), v1::REFUSED);
  EXPECT_TRUE(Mentions(reply, "no longer kept")) << reply.reason();
}

TEST_F(RequestsTest, ADamagedStateIsRefusedInWords) {
  const auto night = Night(Sample("a"), 2);
  Send(night[0]);
  Stop();
  {
    SQLite::Database database(settings_.ledger_path(), SQLite::OPEN_READWRITE);
    database.exec("UPDATE states SET state = x'00ff00ff'");
  }
  Start();
  const v1::Reply reply = Send(night[1]);
  EXPECT_EQ(reply.outcome(), v1::REFUSED);
  EXPECT_TRUE(Mentions(reply, "cannot go on from the ledger")) << reply.reason();
}

TEST_F(RequestsTest, OldDataAreDroppedWhileItRuns) {
  Send(Night(Sample("a"), 1)[0]);
  requests_->CheckSilence();
  EXPECT_TRUE(book_->State("a"));
  Pass(31 * 86400.0);
  requests_->CheckSilence();
  EXPECT_FALSE(book_->State("a"));
}

TEST_F(RequestsTest, AnswersQuestions) {
  const auto night = Night(Sample("a"), 5);
  for (const auto& recording : night) Send(recording);
  auto other = Night(Sample("b"), 1);
  other[0].snapshot.set_final(true);
  Pass(10);
  Send(other[0]);
  EXPECT_EQ(List(false).runs_size(), 2);
  EXPECT_EQ(List(false).runs(0).run(), "b");
  ASSERT_EQ(List(true).runs_size(), 1);
  EXPECT_EQ(List(true).runs(0).run(), "a");
  Pass(8 * 86400.0);  // nothing came for a week: hardly active
  EXPECT_EQ(List(true).runs_size(), 0);

  const v1::Reply shown = Show("a", 3);
  EXPECT_EQ(shown.outcome(), v1::ANSWERED);
  EXPECT_EQ(shown.advice().scans_done(), 40U);
  ASSERT_EQ(shown.records_size(), 1);
  EXPECT_EQ(shown.records(0).snapshots(), 5U);
  ASSERT_EQ(shown.runs_size(), 3);
  EXPECT_EQ(shown.runs(0).scans_done(), 8U);
  EXPECT_EQ(shown.runs(1).scans_done(), 24U);
  EXPECT_EQ(Show("a").runs_size(), 0);
  EXPECT_TRUE(Mentions(Show("nobody\x1b" + std::string(300, 'x')), "there is no run 'nobody?"));

  v1::Request request;
  request.mutable_read_ledger();
  EXPECT_EQ(Ask(request).records_size(), 2);
  request.mutable_read_ledger()->set_instrument("bench-9");
  EXPECT_EQ(Ask(request).records_size(), 0);
  EXPECT_EQ(Ask(v1::Request()).outcome(), v1::REFUSED);
}

TEST_F(RequestsTest, TellsOfSilenceOnceAndTakesItBack) {
  const auto night = Night(Sample("a"), 4);
  const double every = 8 * 2.5;  // 8 scans of 2.5 s
  for (int i = 0; i < 3; ++i) {
    if (i > 0) Pass(every);
    ASSERT_EQ(Send(night[static_cast<std::size_t>(i)]).outcome(), v1::ACCEPTED);
  }
  const v1::Verdict before = broadcasts_.back().verdict();
  ASSERT_NE(before, v1::ENOUGH);
  ASSERT_TRUE(requests_->SecondsToSilence());
  EXPECT_NEAR(*requests_->SecondsToSilence(), 3 * every, 1e-6);
  broadcasts_.clear();
  Pass(3 * every - 0.1);
  requests_->CheckSilence();
  EXPECT_TRUE(broadcasts_.empty());
  Pass(0.2);
  requests_->CheckSilence();
  Pass(1000);
  requests_->CheckSilence();
  ASSERT_EQ(broadcasts_.size(), 1U);  // once
  const v1::Advice& silent = broadcasts_[0];
  EXPECT_EQ(silent.verdict(), v1::INSPECT);
  const v1::Finding& finding = silent.findings(silent.findings_size() - 1);
  EXPECT_EQ(finding.kind(), v1::SILENT);
  EXPECT_EQ(finding.severity(), v1::HIGH);
  EXPECT_EQ(finding.since_scan(), 24U);
  EXPECT_FALSE(silent.cautions().empty());
  EXPECT_TRUE(MessageDifferencer::Equals(Show("a").advice(), silent));
  EXPECT_EQ(List(true).runs(0).verdict(), v1::INSPECT);
  const v1::RunRecord record = *book_->Record("a");
  EXPECT_EQ(record.verdicts(record.verdicts_size() - 1).verdict(), v1::INSPECT);

  // A restart tells nothing a second time.
  Restart();
  Pass(100 * every);
  requests_->CheckSilence();
  EXPECT_EQ(broadcasts_.size(), 1U);

  const v1::Reply next = Send(night[3]);
  ASSERT_EQ(next.outcome(), v1::ACCEPTED) << next.reason();
  EXPECT_TRUE(MessageDifferencer::Equals(next.advice(), Uninterrupted(settings_, night)[3]));
  for (const v1::Finding& left : next.advice().findings()) EXPECT_NE(left.kind(), v1::SILENT);
  const v1::RunRecord after = *book_->Record("a");
  EXPECT_EQ(after.verdicts(after.verdicts_size() - 1).verdict(), next.advice().verdict());
  EXPECT_TRUE(requests_->SecondsToSilence());
}

TEST_F(RequestsTest, ARestartStillExpectsSnapshots) {
  const auto night = Night(Sample("a"), 3);
  for (const auto& recording : night) Send(recording);
  Restart();
  EXPECT_EQ(requests_->resumed(), 1U);
  ASSERT_TRUE(requests_->SecondsToSilence());
  EXPECT_NEAR(*requests_->SecondsToSilence(), 60, 1e-6);
  broadcasts_.clear();
  Pass(61);
  requests_->CheckSilence();
  EXPECT_EQ(broadcasts_.size(), 1U);
}

TEST_F(RequestsTest, ARunThatEndedOrHasEnoughIsNotSilent) {
  auto night = Night(Sample("ended"), 3);
  night[2].snapshot.set_final(true);
  for (const auto& recording : night) Send(recording);
  rehearsal::InventedSample strong = Sample("strong");
  strong.lines[0].signal_to_noise_per_scan = 50;
  const auto enough = Night(strong, 3);
  v1::Reply last;
  for (const auto& recording : enough) last = Send(recording);
  ASSERT_EQ(last.advice().verdict(), v1::ENOUGH) << last.advice().because();
  EXPECT_FALSE(requests_->SecondsToSilence());
  Restart();
  EXPECT_FALSE(requests_->SecondsToSilence());
}

TEST_F(RequestsTest, SilenceThatCannotBeNotedIsTriedAgain) {
  const auto night = Night(Sample("a"), 3);
  for (const auto& recording : night) Send(recording);
  broadcasts_.clear();
  Pass(61);
  {
    SQLite::Database other(settings_.ledger_path(), SQLite::OPEN_READWRITE);
    other.exec("BEGIN IMMEDIATE");
    requests_->CheckSilence();
  }
  EXPECT_TRUE(broadcasts_.empty());
  ASSERT_TRUE(requests_->SecondsToSilence());
  EXPECT_GT(*requests_->SecondsToSilence(), 1);  // no busy loop
  Pass(31);
  requests_->CheckSilence();
  EXPECT_EQ(broadcasts_.size(), 1U);
}

}  // namespace
}  // namespace lastscan::service
