// The page's HTML, made here and nowhere else. Everything that came from
// outside is escaped; there is no inline script and no inline style, so that the
// strictest Content-Security-Policy holds. What changes while one looks stands
// in children of <main> with an id each: page.js puts the new ones in place.
#pragma once

#include <string>
#include <vector>

#include "lastscan/v1/advice.pb.h"
#include "page/run_book.h"

namespace lastscan::page {

// All runs at a glance: those of the last half day before `now`, most urgent
// first, then the earlier ones.
std::string RunsPage(const Shelf& shelf, const std::string& daemon_endpoint, std::time_t now);

// One run in depth. REQUIRES: history is not empty.
std::string RunPage(const Shelf& shelf, const std::vector<v1::Advice>& history,
                    const std::string& daemon_endpoint);

// A page that says in one line why there is nothing else to see.
std::string TroublePage(const std::string& title, const std::string& what);

// The assets: constant text.
std::string_view PageScript();
std::string_view PageStyle();
std::string_view PageIcon();

}  // namespace lastscan::page
