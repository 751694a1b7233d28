// The fingerprint of a snapshot: two chained SHA-1 name digests.
#include "ledger/fingerprint.h"

#include <google/protobuf/io/coded_stream.h>
#include <google/protobuf/io/zero_copy_stream_impl_lite.h>

#include <boost/uuid/name_generator_sha1.hpp>
#include <boost/uuid/uuid.hpp>

namespace lastscan::ledger {

std::string Fingerprint(const v1::Snapshot& header, std::string_view samples) {
  std::string bytes;
  {
    google::protobuf::io::StringOutputStream stream(&bytes);
    google::protobuf::io::CodedOutputStream coded(&stream);
    // Two serialisations of equal messages may differ unless asked not to.
    coded.SetSerializationDeterministic(true);
    header.SerializeToCodedStream(&coded);
  }
  // Chaining, rather than one pass over both parts, keeps a byte that moves
  // from the header to the samples from going unseen.
  const boost::uuids::uuid of_header =
      boost::uuids::name_generator_sha1(boost::uuids::uuid{})(bytes.data(), bytes.size());
  const boost::uuids::uuid of_both =
      boost::uuids::name_generator_sha1(of_header)(samples.data(), samples.size());
  return std::string(of_both.begin(), of_both.end());
}

}  // namespace lastscan::ledger
