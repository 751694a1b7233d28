// lastscan feed --follow and lastscan watch against a real daemon: complete
// files only, each once, over restarts of either side.
#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <poll.h>
#include <pty.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <csignal>
#include <filesystem>
#include <thread>

#include "service/client_bench.h"

namespace lastscan::testing {
namespace {

namespace fs = std::filesystem;
using ::testing::HasSubstr;
using ::testing::Not;

constexpr std::chrono::seconds kSoon{20};

int Count(const std::string& text, const std::string& what) {
  int count = 0;
  for (std::size_t at = text.find(what); at != std::string::npos; at = text.find(what, at + 1)) {
    ++count;
  }
  return count;
}

class ClientFollow : public ClientBench {
 protected:
  void SetUp() override {
    ClientBench::SetUp();
    fs::create_directories(Path("exports"));
  }

  Running Follow() {
    return StartClient({"feed", "--follow", Path("exports"), "--settle", "0.2", "--give-up", "0.6",
                        "--rescan", "1", "--target", "10", "--window", "95:105"});
  }

  std::string Export(const std::string& name, std::uint64_t scans) {
    return Write("exports/" + name, run_.AdvanceTo(scans));
  }

  // Times that a snapshot after `scans` scans is reported in `text`.
  static int Told(const std::string& text, std::uint64_t scans) {
    return Count(text, "scan " + std::to_string(scans) + ":");
  }

 private:
  rehearsal::InventedRun run_{Sample(), 7};
};

TEST_F(ClientFollow, SendsEachFileOnceOverRestartsOfEitherSide) {
  Export("scan-064.jdx", 64);
  Running follower = Follow();
  // No daemon: said once, however often it is tried.
  ASSERT_TRUE(Within(kSoon, [&] { return Count(follower.err(), "no daemon answers") == 1; }))
      << follower.err();
  std::this_thread::sleep_for(std::chrono::milliseconds(1500));
  EXPECT_EQ(Count(follower.err(), "no daemon answers"), 1);

  Running daemon = StartDaemon();
  ASSERT_TRUE(Within(kSoon, [&] { return Told(follower.out(), 64) == 1; })) << follower.err();
  EXPECT_THAT(follower.err(), HasSubstr("answers again"));
  Export("scan-128.jdx", 128);
  ASSERT_TRUE(Within(kSoon, [&] { return Told(follower.out(), 128) == 1; })) << follower.err();

  // The daemon goes and comes back; a snapshot appears in between.
  EXPECT_EQ(daemon.Stop(SIGTERM).code, 0);
  Export("scan-192.jdx", 192);
  ASSERT_TRUE(Within(kSoon, [&] { return Count(follower.err(), "no daemon answers") == 2; }))
      << follower.err();
  daemon = StartDaemon();
  ASSERT_TRUE(Within(std::chrono::seconds(60), [&] { return Told(follower.out(), 192) == 1; }))
      << follower.err();

  // The follower goes and comes back; another snapshot appears in between.
  Finished first = follower.Stop(SIGTERM);
  EXPECT_EQ(first.code, 0);
  EXPECT_EQ(Told(first.out, 64), 1);
  EXPECT_EQ(Told(first.out, 128), 1);
  Export("scan-256.jdx", 256);
  follower = Follow();
  ASSERT_TRUE(Within(kSoon, [&] { return Told(follower.out(), 256) == 1; })) << follower.err();
  std::this_thread::sleep_for(std::chrono::milliseconds(1500));
  const Finished second = follower.Stop(SIGINT);
  EXPECT_EQ(second.code, 0);
  EXPECT_EQ(second.err, "");
  for (const std::uint64_t scans : {64, 128, 192}) EXPECT_EQ(Told(second.out, scans), 0) << scans;
  EXPECT_THAT(Client({"show", "exports", "--json"}).out, HasSubstr("\"scansDone\":\"256\""));
}

TEST_F(ClientFollow, WaitsForAFileToBeComplete) {
  Running daemon = StartDaemon();
  const std::string whole =
      Read(Write("apart/a.jdx", rehearsal::InventedRun(Sample(), 7).AdvanceTo(64)));
  Write("exports/scan-064.jdx", whole.substr(0, whole.size() / 2));
  Running follower = Follow();
  // Reported once when it stays incomplete, and never sent.
  ASSERT_TRUE(Within(kSoon, [&] { return follower.err() != ""; }));
  std::this_thread::sleep_for(std::chrono::milliseconds(2500));
  EXPECT_TRUE(IsOneErrorLine(follower.err()));
  EXPECT_THAT(follower.err(), HasSubstr("scan-064.jdx"));
  EXPECT_EQ(Told(follower.out(), 64), 0);
  // Completed after all: sent.
  Write("exports/scan-064.jdx", whole);
  ASSERT_TRUE(Within(kSoon, [&] { return Told(follower.out(), 64) == 1; })) << follower.err();
  EXPECT_EQ(follower.Stop(SIGTERM).code, 0);
}

TEST_F(ClientFollow, AFileWrittenOverIsANewSnapshot) {
  Running daemon = StartDaemon();
  Running follower = Follow();
  Export("now.jdx", 64);
  ASSERT_TRUE(Within(kSoon, [&] { return Told(follower.out(), 64) == 1; })) << follower.err();
  Export("now.jdx", 128);
  ASSERT_TRUE(Within(kSoon, [&] { return Told(follower.out(), 128) == 1; })) << follower.err();
  EXPECT_EQ(follower.Stop(SIGTERM).err, "");
}

TEST_F(ClientFollow, AFolderInsideIsARunOfItsOwn) {
  Running daemon = StartDaemon();
  Running follower = Follow();
  Export("night-1/scan-064.jdx", 64);
  ASSERT_TRUE(Within(kSoon, [&] { return Told(follower.out(), 64) == 1; })) << follower.err();
  Export("night-2/scan-128.jdx", 128);
  ASSERT_TRUE(Within(kSoon, [&] { return Told(follower.out(), 128) == 1; })) << follower.err();
  const std::string runs = Client({"runs", "--json"}).out;
  EXPECT_THAT(runs, HasSubstr("\"run\":\"night-1\""));
  EXPECT_THAT(runs, HasSubstr("\"run\":\"night-2\""));
}

TEST_F(ClientFollow, AFolderThatIsNoneOrTakenIsRefused) {
  const Finished none = Client({"feed", "--follow", Path("nowhere")});
  EXPECT_EQ(none.code, 1);
  EXPECT_TRUE(IsOneErrorLine(none.err));
  Running follower = Follow();
  ASSERT_TRUE(Within(kSoon, [&] { return follower.out() != ""; }));
  const Finished second = Client({"feed", "--follow", Path("exports")});
  EXPECT_EQ(second.code, 1);
  EXPECT_TRUE(IsOneErrorLine(second.err));
  EXPECT_THAT(second.err, HasSubstr("followed by another"));
}

TEST_F(ClientFollow, WatchPrintsALineAnAdviceWhereThereIsNoTerminal) {
  Running daemon = StartDaemon();
  const std::string first = Export("scan-064.jdx", 64);
  EXPECT_EQ(Client({"feed", first}).code, 0);
  Running watch = StartClient({"watch"});
  ASSERT_TRUE(Within(kSoon, [&] { return Told(watch.out(), 64) == 1; })) << watch.err();
  EXPECT_EQ(Client({"feed", Export("scan-128.jdx", 128)}).code, 0);
  ASSERT_TRUE(Within(kSoon, [&] { return Told(watch.out(), 128) == 1; })) << watch.err();
  const Finished end = watch.Stop(SIGTERM);
  EXPECT_EQ(end.code, 0);
  EXPECT_THAT(end.out, Not(HasSubstr("\033")));
  EXPECT_THAT(end.out, HasSubstr("ferromagnetic"));
}

// On a terminal: the alternate screen, and the terminal as it was afterwards,
// after `leave` has been done to the watcher.
class ClientWatch : public ClientFollow {
 protected:
  void ExpectTerminalGivenBack(const std::function<void(int terminal, pid_t watcher)>& leave) {
    Running daemon = StartDaemon();
    EXPECT_EQ(Client({"feed", Export("scan-064.jdx", 64)}).code, 0);
    winsize size{};
    size.ws_col = 80;
    size.ws_row = 24;
    int terminal = -1;
    const pid_t watcher = forkpty(&terminal, nullptr, nullptr, &size);
    if (watcher == 0) {
      setenv("HOME", folder_.c_str(), 1);
      setenv("XDG_RUNTIME_DIR", (folder_ / "run").c_str(), 1);
      setenv("TERM", "xterm", 1);
      setenv("NO_COLOR", "1", 1);
      execl(LASTSCAN_CLIENT, LASTSCAN_CLIENT, "watch", nullptr);
      _exit(127);
    }
    std::string shown;
    const auto read_on = [&] {
      char block[4096];
      pollfd item{terminal, POLLIN, 0};
      while (poll(&item, 1, 20) > 0) {
        const ssize_t count = read(terminal, block, sizeof block);
        if (count <= 0) return;
        shown.append(block, static_cast<std::size_t>(count));
      }
    };
    ASSERT_TRUE(Within(kSoon, [&] {
      read_on();
      return shown.find("scan") != std::string::npos;
    })) << shown;
    EXPECT_THAT(shown, HasSubstr("\033[?1049h"));
    EXPECT_THAT(shown, Not(HasSubstr("\033[?1049l")));
    EXPECT_THAT(shown, Not(HasSubstr("\033[1;")));  // no colours
    leave(terminal, watcher);
    int status = 0;
    ASSERT_TRUE(Within(kSoon, [&] {
      read_on();
      return waitpid(watcher, &status, WNOHANG) == watcher;
    }));
    read_on();
    EXPECT_TRUE(WIFEXITED(status) && WEXITSTATUS(status) == 0) << status;
    EXPECT_THAT(shown, HasSubstr("\033[?25h\033[?1049l"));
    close(terminal);
  }
};

TEST_F(ClientWatch, QuitsByKey) {
  ExpectTerminalGivenBack([](int terminal, pid_t) { EXPECT_EQ(write(terminal, "q", 1), 1); });
}

TEST_F(ClientWatch, QuitsBySignal) {
  ExpectTerminalGivenBack([](int, pid_t watcher) { kill(watcher, SIGTERM); });
}

TEST_F(ClientWatch, QuitsByInterruptKey) {
  ExpectTerminalGivenBack([](int terminal, pid_t) { EXPECT_EQ(write(terminal, "\x03", 1), 1); });
}

}  // namespace
}  // namespace lastscan::testing
