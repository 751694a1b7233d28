// Messages as JSON Lines: proto3 JSON with every field printed, one message a
// line. A time that does not exist (an upper limit that is infinite) is null.
#pragma once

#include <google/protobuf/message.h>

#include <string>

namespace lastscan::commands {

// Without a line feed. Infinite numbers are "Infinity", 64-bit whole numbers
// strings, as the proto3 JSON mapping has it.
std::string JsonLine(const google::protobuf::Message& message);

// The same with a member "cautions" added, for messages that have none.
std::string JsonLineWithCautions(const google::protobuf::Message& message);

}  // namespace lastscan::commands
