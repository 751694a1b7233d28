// Notices of changed folders through inotify: see folder_notices.h.
#include "commands/folder_notices.h"

#include <sys/inotify.h>
#include <unistd.h>

#include <array>

namespace lastscan::commands {

FolderNotices::FolderNotices() : descriptor_(inotify_init1(IN_NONBLOCK | IN_CLOEXEC)) {}

FolderNotices::~FolderNotices() {
  if (descriptor_ >= 0) close(descriptor_);
}

void FolderNotices::Watch(const std::string& folder) {
  if (descriptor_ < 0) return;
  // The kernel knows a folder by its inode: a second watch on the same one
  // changes nothing, and a folder made anew gets a new one. A failure (no
  // watches left) leaves the regular looks.
  inotify_add_watch(descriptor_, folder.c_str(),
                    IN_CREATE | IN_CLOSE_WRITE | IN_MOVED_TO | IN_ONLYDIR);
}

bool FolderNotices::Drain() {
  std::array<char, 4096> block{};
  bool any = false;
  while (read(descriptor_, block.data(), block.size()) > 0) any = true;
  return any;
}

}  // namespace lastscan::commands
