// The ledger: transactions and questions over the tables of file.cpp.
#include "ledger/ledger.h"

#include <SQLiteCpp/Database.h>
#include <SQLiteCpp/Exception.h>
#include <SQLiteCpp/Statement.h>
#include <SQLiteCpp/Transaction.h>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <limits>

#include "ledger/file.h"
#include "ledger/rows.h"

namespace lastscan::ledger {

class Ledger::File {
 public:
  // The order matters: nothing is touched before the lock is held and the
  // header was found to be ours.
  explicit File(const std::string& path)
      : path_(path), lock_(Locked(path)), database_(OpenDatabase(path)) {}

  // Runs `work` on the database; what SQLite says against it becomes one line.
  template <typename Work>
  auto Do(const char* what, Work&& work) -> decltype(work(std::declval<SQLite::Database&>())) {
    try {
      return work(database_);
    } catch (const SQLite::Exception& error) {
      throw LedgerError("ledger " + path_ + " cannot be " + what + ": " + error.what());
    }
  }

  template <typename Work>
  void Write(Work&& work) {
    Do("written", [&](SQLite::Database& database) {
      // IMMEDIATE: a reader that will write later could otherwise be refused
      // half-way, after its first statements.
      SQLite::Transaction transaction(database, SQLite::TransactionBehavior::IMMEDIATE);
      work(database);
      transaction.commit();
    });
  }

 private:
  static std::unique_ptr<FileLock> Locked(const std::string& path) {
    if (path == ":memory:") return nullptr;
    MakeFolderOf(path);
    auto lock = std::make_unique<FileLock>(path);
    CheckHeader(path);
    return lock;
  }

  std::string path_;
  std::unique_ptr<FileLock> lock_;
  SQLite::Database database_;
};

namespace {

std::optional<v1::Advice> OneAdvice(SQLite::Statement& row) {
  if (!row.executeStep()) return std::nullopt;
  v1::Advice advice;
  ReadMessage(row, 0, &advice);
  return advice;
}

std::vector<double> Intervals(SQLite::Database& database, const std::string& run,
                              std::size_t most) {
  SQLite::Statement row(database,
                        "SELECT recorded_at, arrived_at FROM snapshots WHERE run = ? "
                        "ORDER BY scans_done DESC LIMIT ?");
  row.bind(1, run);
  row.bind(2, static_cast<std::int64_t>(most) + 1);
  std::vector<double> intervals;
  std::optional<std::pair<std::int64_t, std::int64_t>> later;
  while (row.executeStep()) {
    const std::int64_t recorded = row.getColumn(0).getInt64();
    const std::int64_t arrived = row.getColumn(1).getInt64();
    if (later) {
      // The spectrometer's clock says it best; one that stands still or is set
      // back says nothing, then the daemon's clock must do.
      const std::int64_t between = later->first - recorded;
      intervals.push_back(1e-6 *
                          static_cast<double>(between > 0 ? between : later->second - arrived));
    }
    later = {recorded, arrived};
  }
  std::reverse(intervals.begin(), intervals.end());
  return intervals;
}

}  // namespace

Ledger::Ledger(const std::string& path) : file_(std::make_unique<File>(path)) {}
Ledger::~Ledger() = default;

void Ledger::AddSnapshot(const SnapshotEntry& entry) {
  file_->Write([&](SQLite::Database& database) {
    const std::int64_t arrived_at = ToMicroseconds(entry.arrived_at);
    WriteRecord(database, *entry.record, *entry.advice, arrived_at);
    SQLite::Statement snapshot(database, "INSERT INTO snapshots VALUES (?, ?, ?, ?, ?, ?)");
    snapshot.bind(1, entry.record->run());
    snapshot.bind(2, static_cast<std::int64_t>(entry.record->scans_done()));
    snapshot.bind(3, entry.fingerprint.data(), static_cast<int>(entry.fingerprint.size()));
    snapshot.bind(4, ToMicroseconds(entry.record->last_at()));
    snapshot.bind(5, arrived_at);
    BindMessage(snapshot, 6, *entry.advice);
    snapshot.exec();
    SQLite::Statement state(database,
                            "INSERT INTO states VALUES (?1, ?2) "
                            "ON CONFLICT (run) DO UPDATE SET state = ?2");
    state.bind(1, entry.record->run());
    state.bindNoCopy(2, entry.state.data(), static_cast<int>(entry.state.size()));
    state.exec();
  });
}

void Ledger::AddAdvice(const v1::RunRecord& record, const v1::Advice& advice) {
  file_->Write([&](SQLite::Database& database) { WriteRecord(database, record, advice, -1); });
}

std::optional<v1::Advice> Ledger::AdviceGiven(const std::string& run, std::uint64_t scans_done,
                                              std::string_view fingerprint) const {
  return file_->Do("read", [&](SQLite::Database& database) {
    SQLite::Statement row(database,
                          "SELECT advice FROM snapshots "
                          "WHERE run = ? AND scans_done = ? AND fingerprint = ?");
    row.bind(1, run);
    row.bind(2, static_cast<std::int64_t>(scans_done));
    row.bind(3, fingerprint.data(), static_cast<int>(fingerprint.size()));
    return OneAdvice(row);
  });
}

std::optional<v1::RunRecord> Ledger::Record(const std::string& run) const {
  return file_->Do("read", [&](SQLite::Database& database) -> std::optional<v1::RunRecord> {
    SQLite::Statement row(database,
                          std::string("SELECT ") + kRecordColumns + " FROM runs WHERE run = ?");
    row.bind(1, run);
    if (!row.executeStep()) return std::nullopt;
    return ReadRecord(database, row);
  });
}

std::optional<v1::Advice> Ledger::LatestAdvice(const std::string& run) const {
  return file_->Do("read", [&](SQLite::Database& database) {
    SQLite::Statement row(database, "SELECT advice FROM runs WHERE run = ?");
    row.bind(1, run);
    return OneAdvice(row);
  });
}

std::optional<std::string> Ledger::State(const std::string& run) const {
  return file_->Do("read", [&](SQLite::Database& database) -> std::optional<std::string> {
    SQLite::Statement row(database, "SELECT state FROM states WHERE run = ?");
    row.bind(1, run);
    if (!row.executeStep()) return std::nullopt;
    return row.getColumn(0).getString();
  });
}

std::vector<v1::Advice> Ledger::History(const std::string& run, std::size_t most) const {
  return file_->Do("read", [&](SQLite::Database& database) {
    std::vector<v1::Advice> history;
    if (most == 0) return history;
    SQLite::Statement counting(database, "SELECT count(*) FROM snapshots WHERE run = ?");
    counting.bind(1, run);
    counting.executeStep();
    const auto count = static_cast<std::size_t>(counting.getColumn(0).getInt64());
    SQLite::Statement row(database,
                          "SELECT advice FROM snapshots WHERE run = ? ORDER BY scans_done");
    row.bind(1, run);
    const std::size_t kept = std::min(count, most);
    for (std::size_t i = 0; row.executeStep(); ++i) {
      // The look at position p of `kept` is the one at round(p (count-1)/(kept-1)).
      const std::size_t next = history.size();
      const std::size_t wanted =
          kept < 2 ? count - 1 : (next * (count - 1) + (kept - 1) / 2) / (kept - 1);
      if (i == wanted) ReadMessage(row, 0, &history.emplace_back());
    }
    SQLite::Statement latest(database, "SELECT advice FROM runs WHERE run = ?");
    latest.bind(1, run);
    if (const auto advice = OneAdvice(latest);
        advice && !history.empty() &&
        advice->SerializeAsString() != history.back().SerializeAsString()) {
      history.back() = *advice;
    }
    return history;
  });
}

std::vector<v1::Advice> Ledger::LatestAdvices(bool open_only, double since,
                                              std::size_t most) const {
  return file_->Do("read", [&](SQLite::Database& database) {
    SQLite::Statement row(database,
                          "SELECT advice FROM runs WHERE NOT ?1 OR (NOT ended AND arrived_at >= "
                          "?2) ORDER BY arrived_at DESC, run LIMIT ?3");
    row.bind(1, open_only ? 1 : 0);
    row.bind(2, ToMicroseconds(since));
    row.bind(3, static_cast<std::int64_t>(most));
    std::vector<v1::Advice> advices;
    while (row.executeStep()) ReadMessage(row, 0, &advices.emplace_back());
    return advices;
  });
}

std::vector<v1::RunRecord> Ledger::Records(const v1::ReadLedger& filter) const {
  return file_->Do("read", [&](SQLite::Database& database) {
    SQLite::Statement row(database,
                          std::string("SELECT ") + kRecordColumns +
                              " FROM runs WHERE (?1 = '' OR instrument = ?1) AND (?2 = '' OR "
                              "nucleus = ?2) AND (?3 = '' OR sample = ?3) "
                              "ORDER BY last_at DESC, run LIMIT ?4");
    row.bind(1, filter.instrument());
    row.bind(2, filter.nucleus());
    row.bind(3, filter.sample());
    row.bind(4, filter.limit() == 0 ? std::int64_t{-1} : std::int64_t{filter.limit()});
    std::vector<v1::RunRecord> records;
    while (row.executeStep()) records.push_back(ReadRecord(database, row));
    return records;
  });
}

std::vector<OpenRun> Ledger::OpenRuns(double since, std::size_t most_intervals) const {
  return file_->Do("read", [&](SQLite::Database& database) {
    SQLite::Statement row(database, std::string("SELECT ") + kRecordColumns +
                                        ", advice FROM runs WHERE NOT ended AND arrived_at >= ? "
                                        "ORDER BY arrived_at DESC, run");
    row.bind(1, ToMicroseconds(since));
    std::vector<OpenRun> runs;
    while (row.executeStep()) {
      OpenRun& run = runs.emplace_back();
      run.record = ReadRecord(database, row);
      ReadMessage(row, kRecordColumnCount, &run.advice);
      run.intervals_s = Intervals(database, run.record.run(), most_intervals);
    }
    return runs;
  });
}

int Ledger::DropStates(double before) {
  int dropped = 0;
  file_->Write([&](SQLite::Database& database) {
    SQLite::Statement remove(database,
                             "DELETE FROM states WHERE run IN "
                             "(SELECT run FROM runs WHERE arrived_at < ?)");
    remove.bind(1, ToMicroseconds(before));
    dropped = remove.exec();
  });
  return dropped;
}

}  // namespace lastscan::ledger
