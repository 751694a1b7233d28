// lastscan ledger: the records of past and present runs.
#include <google/protobuf/util/time_util.h>
#include <unistd.h>

#include <cmath>
#include <iostream>
#include <memory>

#include "commands/command.h"
#include "commands/connection.h"
#include "commands/json_line.h"
#include "commands/table.h"
#include "commands/terminal.h"
#include "commands/time_option.h"
#include "drawing/words.h"
#include "engine/advice/cautions.h"

namespace lastscan::commands {
namespace {

struct LedgerOptions {
  std::string endpoint;
  std::string instrument;
  std::string nucleus;
  std::string sample;
  std::uint32_t limit = 0;
  bool csv = false;
  bool json = false;
};

// The forecast for the planned end when `share` of the plan was done; empty if
// the run was never looked at then.
std::string ForecastAt(const v1::RunRecord& record, double share) {
  for (const v1::ForecastMark& mark : record.forecasts()) {
    if (std::abs(mark.share_done() - share) < 0.005)
      return ExactNumber(mark.at_planned_end().estimate());
  }
  return "";
}

void PrintTable(const std::vector<v1::RunRecord>& records) {
  std::vector<Row> rows = {{"started", "run", "instrument", "sample", "nucleus", "scans", "planned",
                            "signal-to-noise", "verdict", "scans saved", "time saved"}};
  for (const v1::RunRecord& record : records) {
    const v1::Interval& achieved = record.achieved();
    rows.push_back(
        {LocalTime(record.started_at().seconds()), record.run(), record.instrument(),
         record.sample(), record.nucleus(), std::to_string(record.scans_done()),
         record.scans_planned() == 0 ? "-" : std::to_string(record.scans_planned()),
         achieved.estimate() > 0 ? drawing::WithLimits(achieved)
                                 : "below " + drawing::Number(achieved.upper()),
         std::string(drawing::VerdictInWords(record.verdict())),
         std::to_string(record.scans_saved()),
         record.seconds_saved() > 0 ? drawing::DurationInWords(record.seconds_saved()) : "-"});
  }
  std::cout << AsTable(rows,
                       {false, false, false, false, false, true, true, false, false, true, true});
}

void PrintCsv(const std::vector<v1::RunRecord>& records) {
  using google::protobuf::util::TimeUtil;
  std::cout << engine::CautionsAsComments("# ");
  std::cout << AsCsvLine({"run",
                          "instrument",
                          "sample",
                          "nucleus",
                          "startedAt",
                          "lastAt",
                          "ended",
                          "snapshots",
                          "scansDone",
                          "scansPlanned",
                          "scansSaved",
                          "secondsSaved",
                          "verdict",
                          "target",
                          "signalToNoise",
                          "signalToNoiseLower",
                          "signalToNoiseUpper",
                          "forecastAt10Percent",
                          "forecastAt25Percent",
                          "forecastAt50Percent",
                          "findings"});
  for (const v1::RunRecord& record : records) {
    std::string findings;
    for (const v1::Finding& finding : record.findings()) {
      findings += (findings.empty() ? "" : " ") + v1::FindingKind_Name(finding.kind());
    }
    std::cout << AsCsvLine({record.run(),
                            record.instrument(),
                            record.sample(),
                            record.nucleus(),
                            TimeUtil::ToString(record.started_at()),
                            TimeUtil::ToString(record.last_at()),
                            record.ended() ? "true" : "false",
                            std::to_string(record.snapshots()),
                            std::to_string(record.scans_done()),
                            std::to_string(record.scans_planned()),
                            std::to_string(record.scans_saved()),
                            ExactNumber(record.seconds_saved()),
                            v1::Verdict_Name(record.verdict()),
                            ExactNumber(record.goal().target()),
                            ExactNumber(record.achieved().estimate()),
                            ExactNumber(record.achieved().lower()),
                            ExactNumber(record.achieved().upper()),
                            ForecastAt(record, 0.10),
                            ForecastAt(record, 0.25),
                            ForecastAt(record, 0.50),
                            findings});
  }
}

int PrintLedger(const LedgerOptions& options) {
  Connection connection(options.endpoint);
  v1::Request request;
  v1::ReadLedger& filter = *request.mutable_read_ledger();
  filter.set_instrument(options.instrument);
  filter.set_nucleus(options.nucleus);
  filter.set_sample(options.sample);
  filter.set_limit(options.limit);
  const v1::Reply reply = AskOrFail(connection, request);
  const std::vector<v1::RunRecord> records(reply.records().begin(), reply.records().end());

  if (options.csv) {
    PrintCsv(records);
  } else if (options.json) {
    for (const v1::RunRecord& record : records) std::cout << JsonLineWithCautions(record) << '\n';
  } else {
    if (records.empty()) {
      std::cout << "no records match\n";
    } else {
      PrintTable(records);
    }
    std::cout << '\n' << CautionsInFull(StyleOf(STDOUT_FILENO));
  }
  return kDone;
}

}  // namespace

void AddLedger(CLI::App& program, Job& job) {
  auto options = std::make_shared<LedgerOptions>();
  CLI::App* command =
      program.add_subcommand("ledger", "Lists what runs were promised and what they achieved");
  command->add_option("--instrument", options->instrument, "only this instrument");
  command->add_option("--nucleus", options->nucleus, "only this nucleus, such as 13C");
  command->add_option("--sample", options->sample, "only this sample");
  command->add_option("--limit", options->limit, "at most so many, newest first");
  CLI::Option* csv = command->add_flag("--csv", options->csv, "print CSV, cautions as comments");
  command->add_flag("--json", options->json, "print JSON Lines")->excludes(csv);
  AddEndpointOption(*command, options->endpoint);
  command->footer(
      "Examples:\n"
      "  lastscan ledger --instrument hall-2 --limit 20\n"
      "  lastscan ledger --nucleus 13C --csv > ledger.csv");
  command->callback([options, &job] { job = [options] { return PrintLedger(*options); }; });
}

}  // namespace lastscan::commands
