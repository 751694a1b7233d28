// Records to rows of the tables and back. For ledger.cpp only; every function
// throws SQLite::Exception.
#pragma once

#include <SQLiteCpp/Database.h>
#include <SQLiteCpp/Statement.h>
#include <google/protobuf/message_lite.h>
#include <google/protobuf/timestamp.pb.h>

#include <cstdint>
#include <string>

#include "lastscan/v1/advice.pb.h"
#include "lastscan/v1/ledger.pb.h"

namespace lastscan::ledger {

// Microseconds since 1970.
std::int64_t ToMicroseconds(double unix_seconds);
std::int64_t ToMicroseconds(const google::protobuf::Timestamp& time);
google::protobuf::Timestamp FromMicroseconds(std::int64_t time);

// Binds a message's bytes to the parameter at `index`.
void BindMessage(SQLite::Statement& statement, int index,
                 const google::protobuf::MessageLite& message);

// Reads the message in column `index`. Throws LedgerError if it is damaged.
void ReadMessage(SQLite::Statement& statement, int index, google::protobuf::MessageLite* message);

// Writes the run's row, keeping its arrived_at when `arrived_at` is negative,
// and its verdicts, forecasts and findings.
void WriteRecord(SQLite::Database& database, const v1::RunRecord& record, const v1::Advice& advice,
                 std::int64_t arrived_at);

// The columns of `runs` that ReadRecord expects first in a row, comma-separated.
extern const char* const kRecordColumns;
inline constexpr int kRecordColumnCount = 18;

// The record whose columns `row` has just fetched, with its verdicts, forecasts
// and findings.
v1::RunRecord ReadRecord(SQLite::Database& database, SQLite::Statement& row);

}  // namespace lastscan::ledger
