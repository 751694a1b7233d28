// The ledger's file: lock, version, tables and write settings.
#include "ledger/file.h"

#include <SQLiteCpp/Exception.h>
#include <SQLiteCpp/Transaction.h>
#include <fcntl.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>

#include <array>
#include <cerrno>
#include <cstdint>
#include <cstring>
#include <fstream>
#include <string_view>

#include "ledger/ledger.h"

namespace lastscan::ledger {
namespace {

// Marks a file as ours in the database's own header ("Lsca").
constexpr std::uint32_t kApplication = 0x4c736361;

// How long another reader or writer is waited for before a call fails.
constexpr int kBusyMilliseconds = 2000;

// Times are microseconds since 1970, UTC. What a program computes with stands
// in columns; goal, facts and advice are messages (proto/lastscan/v1).
constexpr const char* kTables = R"sql(
CREATE TABLE runs (
  run TEXT PRIMARY KEY NOT NULL,
  instrument TEXT NOT NULL, sample TEXT NOT NULL, nucleus TEXT NOT NULL, probe TEXT NOT NULL,
  started_at INTEGER NOT NULL, last_at INTEGER NOT NULL, arrived_at INTEGER NOT NULL,
  ended INTEGER NOT NULL, snapshots INTEGER NOT NULL,
  scans_done INTEGER NOT NULL, scans_planned INTEGER NOT NULL,
  scans_saved INTEGER NOT NULL, seconds_saved REAL NOT NULL,
  verdict TEXT NOT NULL,
  achieved REAL, achieved_lower REAL, achieved_upper REAL,
  facts BLOB NOT NULL, goal BLOB NOT NULL, advice BLOB NOT NULL);
CREATE INDEX runs_by_time ON runs (last_at);
CREATE INDEX runs_by_arrival ON runs (arrived_at);
CREATE INDEX runs_by_probe ON runs (instrument, probe, nucleus, last_at);
CREATE TABLE states (
  run TEXT PRIMARY KEY NOT NULL REFERENCES runs (run), state BLOB NOT NULL);
CREATE TABLE snapshots (
  run TEXT NOT NULL REFERENCES runs (run), scans_done INTEGER NOT NULL,
  fingerprint BLOB NOT NULL, recorded_at INTEGER NOT NULL, arrived_at INTEGER NOT NULL,
  advice BLOB NOT NULL,
  PRIMARY KEY (run, scans_done));
CREATE TABLE verdicts (
  run TEXT NOT NULL REFERENCES runs (run), ordinal INTEGER NOT NULL,
  given_at INTEGER NOT NULL, scans_done INTEGER NOT NULL,
  verdict TEXT NOT NULL, because TEXT NOT NULL,
  PRIMARY KEY (run, ordinal)) WITHOUT ROWID;
CREATE TABLE forecasts (
  run TEXT NOT NULL REFERENCES runs (run), share_done REAL NOT NULL,
  scans_done INTEGER NOT NULL,
  planned_end REAL, planned_end_lower REAL, planned_end_upper REAL,
  needed REAL, needed_lower REAL, needed_upper REAL,
  PRIMARY KEY (run, share_done)) WITHOUT ROWID;
CREATE TABLE findings (
  run TEXT NOT NULL REFERENCES runs (run), kind TEXT NOT NULL,
  severity TEXT NOT NULL, detail TEXT NOT NULL, since_scan INTEGER NOT NULL,
  PRIMARY KEY (run, kind)) WITHOUT ROWID;
)sql";

std::string Quoted(const std::filesystem::path& path) { return "ledger " + path.string(); }

[[noreturn]] void FailForNewer(const std::filesystem::path& path, std::uint32_t version) {
  throw LedgerError(Quoted(path) + " is of version " + std::to_string(version) +
                    ", this program knows up to " + std::to_string(kLedgerVersion) +
                    ": start the newer lastscand, or name another ledger; nothing was changed");
}

[[noreturn]] void FailForForeign(const std::filesystem::path& path) {
  throw LedgerError(Quoted(path) +
                    " is no ledger: it belongs to another program; name another file, nothing "
                    "was changed");
}

std::uint32_t BigEndian(const char* bytes) {
  std::uint32_t value = 0;
  for (int i = 0; i < 4; ++i) value = value << 8 | static_cast<unsigned char>(bytes[i]);
  return value;
}

}  // namespace

void MakeFolderOf(const std::filesystem::path& path) {
  const std::filesystem::path folder = std::filesystem::absolute(path).parent_path();
  const mode_t mask = ::umask(077);
  std::error_code error;
  std::filesystem::create_directories(folder, error);
  ::umask(mask);
  if (error) {
    throw LedgerError("folder " + folder.string() + " cannot be made: " + error.message() +
                      "; make it, or name another ledger in the settings (ledger_path)");
  }
}

FileLock::FileLock(const std::filesystem::path& path) {
  const std::string name = path.string() + ".lock";
  descriptor_ = ::open(name.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0600);
  if (descriptor_ < 0) {
    throw LedgerError(Quoted(path) + " cannot be written: " + std::strerror(errno) +
                      "; mend the rights of its folder, or name another (ledger_path)");
  }
  if (::flock(descriptor_, LOCK_EX | LOCK_NB) != 0) {
    ::close(descriptor_);
    throw LedgerError(Quoted(path) +
                      " is in use by another lastscand: stop that one, or name another "
                      "(ledger_path)");
  }
}

FileLock::~FileLock() { ::close(descriptor_); }

void CheckHeader(const std::filesystem::path& path) {
  std::error_code error;
  const auto status = std::filesystem::status(path, error);
  if (!std::filesystem::exists(status)) return;
  if (!std::filesystem::is_regular_file(status)) {
    throw LedgerError(Quoted(path) + " is not a file: name another (ledger_path)");
  }
  std::ifstream file(path, std::ios::binary);
  if (!file) {
    throw LedgerError(Quoted(path) + " cannot be read: " + std::strerror(errno) +
                      "; mend its rights, or name another (ledger_path)");
  }
  // The header of an SQLite 3 file: magic at 0, user version at 60, application
  // at 68, big-endian ("Database File Format", sqlite.org).
  std::array<char, 100> header{};
  file.read(header.data(), header.size());
  if (file.gcount() == 0) return;  // empty: as good as new
  constexpr std::string_view kMagic("SQLite format 3\0", 16);
  if (file.gcount() < static_cast<std::streamsize>(header.size()) ||
      std::string_view(header.data(), kMagic.size()) != kMagic) {
    FailForForeign(path);
  }
  const std::uint32_t version = BigEndian(&header[60]);
  const std::uint32_t application = BigEndian(&header[68]);
  // A ledger whose first tables are still in its write-ahead log shows zeros
  // here; OpenDatabase looks again through the log.
  if (application != kApplication && application != 0) FailForForeign(path);
  if (application == 0 && version != 0) FailForForeign(path);
  if (version > kLedgerVersion) FailForNewer(path, version);
}

SQLite::Database OpenDatabase(const std::string& path) {
  const mode_t mask = ::umask(077);
  try {
    SQLite::Database database(path, SQLite::OPEN_READWRITE | SQLite::OPEN_CREATE,
                              kBusyMilliseconds);
    const auto version =
        static_cast<std::uint32_t>(database.execAndGet("PRAGMA user_version").getInt64());
    const auto application =
        static_cast<std::uint32_t>(database.execAndGet("PRAGMA application_id").getInt64());
    const bool empty = database.execAndGet("SELECT count(*) FROM sqlite_master").getInt() == 0;
    if (!empty && application != kApplication) FailForForeign(path);
    if (version > kLedgerVersion) FailForNewer(path, version);
    // A run's state is one value of some megabytes: large pages keep its chain short.
    if (empty) database.exec("PRAGMA page_size=16384");
    if (path != ":memory:") database.execAndGet("PRAGMA journal_mode=WAL");
    database.exec("PRAGMA synchronous=FULL");
    database.exec("PRAGMA foreign_keys=ON");
    if (empty) {
      SQLite::Transaction transaction(database, SQLite::TransactionBehavior::IMMEDIATE);
      database.exec(kTables);
      database.exec("PRAGMA application_id=" + std::to_string(kApplication));
      database.exec("PRAGMA user_version=" + std::to_string(kLedgerVersion));
      transaction.commit();
    }
    ::umask(mask);
    return database;
  } catch (const SQLite::Exception& error) {
    ::umask(mask);
    throw LedgerError(Quoted(path) + " cannot be opened: " + error.what() +
                      "; mend its rights, or name another (ledger_path)");
  } catch (...) {
    ::umask(mask);
    throw;
  }
}

}  // namespace lastscan::ledger
