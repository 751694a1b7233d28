// Following folders: each snapshot that a spectrometer leaves there is sent to
// the daemon once, as soon as it is complete.
#pragma once

#include <string>
#include <vector>

#include "commands/goal_options.h"

namespace lastscan::commands {

struct FollowTimes {
  double settle_seconds = 1;    // a file is read when unchanged for so long
  double give_up_seconds = 30;  // an unchanged file that cannot be read is reported
  double rescan_seconds = 20;   // a full look, whether or not a change was told
};

struct FollowOptions {
  std::vector<std::string> folders;
  std::string endpoint;
  GoalOptions goal;
  SnapshotOptions facts;
  FollowTimes times;
  bool json = false;
};

// Follows until SIGINT, SIGTERM or SIGHUP and returns 0 then. Files of `folder`
// are the run `folder`; files of a folder directly inside it are a run of their
// own, unless --run names one run for all. A daemon that is away is waited for.
// A file that cannot be read, or that the daemon refuses, is reported once and
// left until it changes. Throws Failure if a folder cannot be followed at all.
int FollowFolders(const FollowOptions& options);

}  // namespace lastscan::commands
