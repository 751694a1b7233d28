// Numbers, times and the project's own terms in plain words: what the terminal,
// the figures and the page share, so that all three say the same thing.
// No function here ever gives "nan" or "inf".
#pragma once

#include <google/protobuf/timestamp.pb.h>

#include <cstdint>
#include <string>
#include <string_view>

#include "lastscan/v1/advice.pb.h"

namespace lastscan::drawing {

// Three digits or so: "0.42", "4.1", "123", "12345", "1.2e+12"; "not known" for
// what is not a number and "unlimited" for infinity.
std::string Number(double value);

// The same for a number that somebody has set: "10", not "10.0".
std::string Brief(double value);

// A chance of 0..1 in per cent; never quite none and never quite certain:
// "97 %", "over 99 %", "under 1 %". Empty when it is not known.
std::string Chance(double chance);

// An exponent with its limits: "0.51 (0.50 to 0.52)".
std::string ExponentWithLimits(const v1::Interval& interval);

// A chemical shift, "128.42 ppm".
std::string Shift(double ppm);

// A number of scans, rounded up to a whole one. The same words when there is none.
std::string Scans(double value);

// "12.3 (10.9 to 13.6)"; an infinite upper limit is said as "10.9 or more".
std::string WithLimits(const v1::Interval& interval);
std::string ScansWithLimits(const v1::Interval& interval);

// The reading of the limiting line: with its limits when the line is confirmed,
// otherwise "below 4.1 so far". Only an upper limit is known then.
std::string ReadingInWords(const v1::Advice& advice);

// "3 h 12 min", "40 s": a duration in the two largest units; "unlimited" and
// "not known" as in Number. A negative duration counts as none.
std::string DurationInWords(double seconds);

// Local clock time, with the day when it is not the day of `seen_from`:
// "03:14", "2 Dec 03:14", "2 Dec 2027 03:14". Empty when `time` is out of range.
std::string ClockTime(const google::protobuf::Timestamp& time,
                      const google::protobuf::Timestamp& seen_from);

// "03:14 (02:50 to 04:10)"; empty when there is no estimate.
std::string ClockTimes(const v1::TimeInterval& times, const google::protobuf::Timestamp& seen_from);

// A verdict as an operator would say it ("enough", "on course", ...).
std::string_view VerdictInWords(v1::Verdict verdict);

// What to do about it, in one sentence with the number of the scan.
std::string WhatToDo(const v1::Advice& advice);

std::string_view ConventionInWords(v1::Convention convention);
std::string_view FindingInWords(v1::FindingKind kind);
std::string_view SeverityInWords(v1::Severity severity);

// How urgently a person should look: 0 first. Ours: trouble, then what can be
// acted on, then what can be left alone.
int Urgency(v1::Verdict verdict);

}  // namespace lastscan::drawing
