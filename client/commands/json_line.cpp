// JSON Lines through protobuf's own JSON mapping.
#include "commands/json_line.h"

#include <google/protobuf/struct.pb.h>
#include <google/protobuf/timestamp.pb.h>
#include <google/protobuf/util/json_util.h>

#include <memory>
#include <stdexcept>
#include <string_view>

#include "engine/advice/cautions.h"

namespace lastscan::commands {
namespace {

using google::protobuf::FieldDescriptor;
using google::protobuf::Message;
using google::protobuf::Timestamp;

// protobuf leaves out messages that are not set, but a reader is promised every
// field. So absent ones are set: a message to its defaults, a time to a moment
// nobody means, which is then printed as null.
constexpr std::int64_t kNoTimeSeconds = -62135596800;
constexpr std::int32_t kNoTimeNanos = 987654321;
constexpr std::string_view kNoTime = ":\"0001-01-01T00:00:00.987654321Z\"";

void SetAbsent(Message& message) {
  const auto* descriptor = message.GetDescriptor();
  const auto* reflection = message.GetReflection();
  for (int i = 0; i < descriptor->field_count(); ++i) {
    const FieldDescriptor* field = descriptor->field(i);
    if (field->cpp_type() != FieldDescriptor::CPPTYPE_MESSAGE) continue;
    if (field->is_repeated()) {
      for (int j = 0; j < reflection->FieldSize(message, field); ++j) {
        SetAbsent(*reflection->MutableRepeatedMessage(&message, field, j));
      }
      continue;
    }
    const bool absent = !reflection->HasField(message, field);
    Message* value = reflection->MutableMessage(&message, field);
    if (value->GetDescriptor() != Timestamp::descriptor()) {
      SetAbsent(*value);
    } else if (absent) {
      auto& time = dynamic_cast<Timestamp&>(*value);
      time.set_seconds(kNoTimeSeconds);
      time.set_nanos(kNoTimeNanos);
    }
  }
}

std::string ToJson(const Message& message) {
  google::protobuf::util::JsonPrintOptions options;
  options.always_print_primitive_fields = true;
  std::string json;
  const auto status = google::protobuf::util::MessageToJsonString(message, &json, options);
  if (!status.ok()) {
    throw std::runtime_error("an answer cannot be printed as JSON: " +
                             std::string(status.message()));
  }
  return json;
}

}  // namespace

std::string JsonLine(const Message& message) {
  const std::unique_ptr<Message> complete(message.New());
  complete->CopyFrom(message);
  SetAbsent(*complete);
  std::string json = ToJson(*complete);
  for (std::size_t at = json.find(kNoTime); at != std::string::npos; at = json.find(kNoTime, at)) {
    json.replace(at, kNoTime.size(), ":null");
  }
  return json;
}

std::string JsonLineWithCautions(const Message& message) {
  google::protobuf::ListValue cautions;
  for (const std::string_view caution : engine::Cautions()) {
    cautions.add_values()->set_string_value(std::string(caution));
  }
  std::string json = JsonLine(message);
  json.pop_back();
  return json + (json.size() > 1 ? "," : "") + "\"cautions\":" + ToJson(cautions) + "}";
}

}  // namespace lastscan::commands
