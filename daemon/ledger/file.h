// The ledger's file: lock, version, tables and write settings. For ledger.cpp only.
#pragma once

#include <SQLiteCpp/Database.h>

#include <filesystem>
#include <string>

namespace lastscan::ledger {

// Holds a lock on `path`.lock as long as it lives. The kernel lets go of it when
// the process ends, however it ends, so no lock is ever left behind.
class FileLock {
 public:
  // Throws LedgerError if another process holds it.
  explicit FileLock(const std::filesystem::path& path);
  ~FileLock();
  FileLock(const FileLock&) = delete;
  FileLock& operator=(const FileLock&) = delete;

 private:
  int descriptor_ = -1;
};

// Makes the folder of `path`, readable by the owner only, if it is not there.
// Throws LedgerError.
void MakeFolderOf(const std::filesystem::path& path);

// Throws LedgerError if the file at `path` is there and is no database, another
// program's, or a ledger newer than this program. Reads 100 bytes and writes nothing.
void CheckHeader(const std::filesystem::path& path);

// Opens the database, makes the tables if it is empty, and sets it to lose
// nothing that was committed. Throws LedgerError.
SQLite::Database OpenDatabase(const std::string& path);

}  // namespace lastscan::ledger
