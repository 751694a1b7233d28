// Records to rows of the tables and back.
#include "ledger/rows.h"

#include <google/protobuf/util/time_util.h>

#include <cmath>

#include "ledger/ledger.h"

namespace lastscan::ledger {
namespace {

using google::protobuf::util::TimeUtil;

void BindInterval(SQLite::Statement& statement, int index, const v1::Interval& interval) {
  statement.bind(index, interval.estimate());
  statement.bind(index + 1, interval.lower());
  statement.bind(index + 2, interval.upper());
}

void ReadInterval(SQLite::Statement& row, int index, v1::Interval* interval) {
  interval->set_estimate(row.getColumn(index).getDouble());
  interval->set_lower(row.getColumn(index + 1).getDouble());
  interval->set_upper(row.getColumn(index + 2).getDouble());
}

std::uint64_t Count(SQLite::Statement& row, int index) {
  return static_cast<std::uint64_t>(row.getColumn(index).getInt64());
}

void Bind(SQLite::Statement& statement, int index, std::uint64_t count) {
  statement.bind(index, static_cast<std::int64_t>(count));
}

void WriteVerdicts(SQLite::Database& database, const v1::RunRecord& record) {
  // A verdict once given never changes: what is there stays.
  SQLite::Statement insert(database,
                           "INSERT INTO verdicts VALUES (?, ?, ?, ?, ?, ?) "
                           "ON CONFLICT DO NOTHING");
  for (int i = 0; i < record.verdicts_size(); ++i) {
    const v1::VerdictChange& change = record.verdicts(i);
    insert.bind(1, record.run());
    insert.bind(2, i);
    insert.bind(3, ToMicroseconds(change.at()));
    Bind(insert, 4, change.scans_done());
    insert.bind(5, v1::Verdict_Name(change.verdict()));
    insert.bind(6, change.because());
    insert.exec();
    insert.reset();
  }
}

void WriteForecasts(SQLite::Database& database, const v1::RunRecord& record) {
  SQLite::Statement insert(database,
                           "INSERT INTO forecasts VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?) "
                           "ON CONFLICT DO NOTHING");
  for (const v1::ForecastMark& mark : record.forecasts()) {
    insert.bind(1, record.run());
    insert.bind(2, mark.share_done());
    Bind(insert, 3, mark.scans_done());
    BindInterval(insert, 4, mark.at_planned_end());
    BindInterval(insert, 7, mark.scans_needed());
    insert.exec();
    insert.reset();
  }
}

void WriteFindings(SQLite::Database& database, const v1::RunRecord& record) {
  SQLite::Statement insert(database, "INSERT OR REPLACE INTO findings VALUES (?, ?, ?, ?, ?)");
  for (const v1::Finding& finding : record.findings()) {
    insert.bind(1, record.run());
    insert.bind(2, v1::FindingKind_Name(finding.kind()));
    insert.bind(3, v1::Severity_Name(finding.severity()));
    insert.bind(4, finding.detail());
    Bind(insert, 5, finding.since_scan());
    insert.exec();
    insert.reset();
  }
}

void ReadVerdicts(SQLite::Database& database, v1::RunRecord* record) {
  SQLite::Statement row(database,
                        "SELECT given_at, scans_done, verdict, because FROM verdicts "
                        "WHERE run = ? ORDER BY ordinal");
  row.bind(1, record->run());
  while (row.executeStep()) {
    v1::VerdictChange* change = record->add_verdicts();
    *change->mutable_at() = FromMicroseconds(row.getColumn(0).getInt64());
    change->set_scans_done(Count(row, 1));
    v1::Verdict verdict = v1::VERDICT_UNSPECIFIED;
    v1::Verdict_Parse(row.getColumn(2).getString(), &verdict);
    change->set_verdict(verdict);
    change->set_because(row.getColumn(3).getString());
  }
}

void ReadForecasts(SQLite::Database& database, v1::RunRecord* record) {
  SQLite::Statement row(database,
                        "SELECT share_done, scans_done, planned_end, planned_end_lower, "
                        "planned_end_upper, needed, needed_lower, needed_upper FROM forecasts "
                        "WHERE run = ? ORDER BY share_done");
  row.bind(1, record->run());
  while (row.executeStep()) {
    v1::ForecastMark* mark = record->add_forecasts();
    mark->set_share_done(row.getColumn(0).getDouble());
    mark->set_scans_done(Count(row, 1));
    ReadInterval(row, 2, mark->mutable_at_planned_end());
    ReadInterval(row, 5, mark->mutable_scans_needed());
  }
}

void ReadFindings(SQLite::Database& database, v1::RunRecord* record) {
  SQLite::Statement row(database,
                        "SELECT kind, severity, detail, since_scan FROM findings "
                        "WHERE run = ? ORDER BY since_scan, kind");
  row.bind(1, record->run());
  while (row.executeStep()) {
    v1::Finding* finding = record->add_findings();
    v1::FindingKind kind = v1::FINDING_KIND_UNSPECIFIED;
    v1::FindingKind_Parse(row.getColumn(0).getString(), &kind);
    finding->set_kind(kind);
    v1::Severity severity = v1::SEVERITY_UNSPECIFIED;
    v1::Severity_Parse(row.getColumn(1).getString(), &severity);
    finding->set_severity(severity);
    finding->set_detail(row.getColumn(2).getString());
    finding->set_since_scan(Count(row, 3));
  }
}

}  // namespace

std::int64_t ToMicroseconds(double unix_seconds) { return std::llround(unix_seconds * 1e6); }

std::int64_t ToMicroseconds(const google::protobuf::Timestamp& time) {
  return TimeUtil::TimestampToMicroseconds(time);
}

google::protobuf::Timestamp FromMicroseconds(std::int64_t time) {
  return TimeUtil::MicrosecondsToTimestamp(time);
}

void BindMessage(SQLite::Statement& statement, int index,
                 const google::protobuf::MessageLite& message) {
  const std::string bytes = message.SerializeAsString();
  statement.bind(index, bytes.data(), static_cast<int>(bytes.size()));
}

void ReadMessage(SQLite::Statement& statement, int index, google::protobuf::MessageLite* message) {
  const SQLite::Column column = statement.getColumn(index);
  if (!message->ParseFromArray(column.getBlob(), column.getBytes())) {
    throw LedgerError(std::string("the ledger is damaged: its ") + column.getName() +
                      " cannot be read; restore it from a backup");
  }
}

void WriteRecord(SQLite::Database& database, const v1::RunRecord& record, const v1::Advice& advice,
                 std::int64_t arrived_at) {
  SQLite::Statement insert(
      database,
      "INSERT INTO runs VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, max(?8, 0), ?9, ?10, ?11, ?12, ?13, "
      "?14, ?15, ?16, ?17, ?18, ?19, ?20, ?21) ON CONFLICT (run) DO UPDATE SET "
      "probe = ?5, last_at = ?7, arrived_at = iif(?8 < 0, arrived_at, ?8), ended = ?9, "
      "snapshots = ?10, scans_done = ?11, scans_planned = ?12, scans_saved = ?13, "
      "seconds_saved = ?14, verdict = ?15, achieved = ?16, achieved_lower = ?17, "
      "achieved_upper = ?18, facts = ?19, goal = ?20, advice = ?21");
  insert.bind(1, record.run());
  insert.bind(2, record.instrument());
  insert.bind(3, record.sample());
  insert.bind(4, record.nucleus());
  insert.bind(5, record.facts().probe());
  insert.bind(6, ToMicroseconds(record.started_at()));
  insert.bind(7, ToMicroseconds(record.last_at()));
  insert.bind(8, arrived_at);
  insert.bind(9, record.ended() ? 1 : 0);
  insert.bind(10, record.snapshots());
  Bind(insert, 11, record.scans_done());
  Bind(insert, 12, record.scans_planned());
  Bind(insert, 13, record.scans_saved());
  insert.bind(14, record.seconds_saved());
  insert.bind(15, v1::Verdict_Name(record.verdict()));
  BindInterval(insert, 16, record.achieved());
  BindMessage(insert, 19, record.facts());
  BindMessage(insert, 20, record.goal());
  BindMessage(insert, 21, advice);
  insert.exec();
  WriteVerdicts(database, record);
  WriteForecasts(database, record);
  WriteFindings(database, record);
}

const char* const kRecordColumns =
    "run, instrument, sample, nucleus, started_at, last_at, ended, snapshots, scans_done, "
    "scans_planned, scans_saved, seconds_saved, verdict, achieved, achieved_lower, "
    "achieved_upper, facts, goal";

v1::RunRecord ReadRecord(SQLite::Database& database, SQLite::Statement& row) {
  v1::RunRecord record;
  record.set_run(row.getColumn(0).getString());
  record.set_instrument(row.getColumn(1).getString());
  record.set_sample(row.getColumn(2).getString());
  record.set_nucleus(row.getColumn(3).getString());
  *record.mutable_started_at() = FromMicroseconds(row.getColumn(4).getInt64());
  *record.mutable_last_at() = FromMicroseconds(row.getColumn(5).getInt64());
  record.set_ended(row.getColumn(6).getInt() != 0);
  record.set_snapshots(row.getColumn(7).getUInt());
  record.set_scans_done(Count(row, 8));
  record.set_scans_planned(Count(row, 9));
  record.set_scans_saved(Count(row, 10));
  record.set_seconds_saved(row.getColumn(11).getDouble());
  v1::Verdict verdict = v1::VERDICT_UNSPECIFIED;
  v1::Verdict_Parse(row.getColumn(12).getString(), &verdict);
  record.set_verdict(verdict);
  ReadInterval(row, 13, record.mutable_achieved());
  ReadMessage(row, 16, record.mutable_facts());
  ReadMessage(row, 17, record.mutable_goal());
  ReadVerdicts(database, &record);
  ReadForecasts(database, &record);
  ReadFindings(database, &record);
  return record;
}

}  // namespace lastscan::ledger
