// Times as people write them on a command line.
#pragma once

#include <google/protobuf/timestamp.pb.h>

#include <ctime>
#include <string>

namespace lastscan::commands {

// Reads `text`: RFC 3339 ("2027-01-31T07:30:00+01:00"), local time
// ("2027-01-31 07:30", seconds allowed) or the next such time of day after
// `now` ("07:30"). `option` is named in the error. Throws WrongUse.
google::protobuf::Timestamp ReadTime(const std::string& option, const std::string& text,
                                     std::time_t now);

// "2027-01-31 07:30" in local time.
std::string LocalTime(std::time_t time);

}  // namespace lastscan::commands
