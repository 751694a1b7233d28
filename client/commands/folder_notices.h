// The kernel's notices that something changed in a folder. They are hints: where
// there are none (a network folder, too many watches) looking again finds all.
#pragma once

#include <string>

namespace lastscan::commands {

class FolderNotices {
 public:
  FolderNotices();
  ~FolderNotices();
  FolderNotices(const FolderNotices&) = delete;
  FolderNotices& operator=(const FolderNotices&) = delete;

  // Watches `folder`, also when it was removed and made again. Asking again for
  // a folder that is watched does nothing.
  void Watch(const std::string& folder);

  // Readable when there are notices; -1 where the kernel has none to give.
  int descriptor() const { return descriptor_; }
  // Takes all notices off; whether there were any.
  bool Drain();

 private:
  int descriptor_;
};

}  // namespace lastscan::commands
