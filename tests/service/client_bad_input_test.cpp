// The real client on bad input: one clear line that says what, where and what
// to do, a non-zero exit code, and nothing lost or changed.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <csignal>
#include <filesystem>

#include "service/client_bench.h"

namespace lastscan::testing {
namespace {

namespace fs = std::filesystem;
using ::testing::HasSubstr;

class ClientBadInput : public ClientBench {
 protected:
  // A snapshot file after `scans` scans of the same invented run.
  formats::Recording Look(std::uint64_t scans, rehearsal::InventedSample sample = Sample()) {
    return rehearsal::InventedRun(std::move(sample), 7).AdvanceTo(scans);
  }

  void ExpectRefused(const std::vector<std::string>& arguments, const std::string& where,
                     const std::string& what, int code = 1) {
    const Finished run = Client(arguments);
    EXPECT_EQ(run.code, code) << run.out << run.err;
    EXPECT_TRUE(IsOneErrorLine(run.err));
    EXPECT_THAT(run.err, HasSubstr(where));
    EXPECT_THAT(run.err, HasSubstr(what));
    EXPECT_EQ(run.out, "");
  }
};

TEST_F(ClientBadInput, GoodInputPasses) {
  const std::string file = Write("night/a.jdx", Look(64));
  const Finished run = Client({"assess", file, "--target", "10", "--window", "95:105"});
  EXPECT_EQ(run.code, 0) << run.err;
  EXPECT_EQ(run.err, "");
  EXPECT_THAT(run.out, HasSubstr("64"));
}

TEST_F(ClientBadInput, Files) {
  const std::string whole = Read(Write("night/a.jdx", Look(64)));
  const std::string empty = Write("empty.jdx", "");
  ExpectRefused({"assess", empty}, empty, "empty");

  const std::string binary = Write("binary.jdx", std::string("\x7f"
                                                             "ELF\0\0\1\2\3\xff\xfe",
                                                             11));
  ExpectRefused({"assess", binary}, binary, "");

  const std::string text = Write("letter.txt", "Dear colleague,\nno data here.\n");
  ExpectRefused({"assess", text}, text, "");

  // Cut in its middle, as a file that is still being written looks.
  const std::string cut = Write("cut.jdx", whole.substr(0, whole.size() / 2));
  ExpectRefused({"assess", cut}, cut, "still being written");

  const std::string infrared =
      Write("infrared.jdx",
            "##TITLE= film\n##JCAMP-DX= 4.24\n##DATA TYPE= INFRARED SPECTRUM\n##ORIGIN= lab\n"
            "##OWNER= lab\n##XUNITS= 1/CM\n##YUNITS= TRANSMITTANCE\n##FIRSTX= 1\n##LASTX= 2\n"
            "##XFACTOR= 1\n##YFACTOR= 1\n##FIRSTY= 1\n##NPOINTS= 2\n##XYDATA= (X++(Y..Y))\n1 1 2\n"
            "##END=\n");
  ExpectRefused({"assess", infrared}, infrared, "");

  const std::string flat = Write(
      "plane.jdx",
      "##TITLE= plane\n##JCAMP-DX= 6.00\n##DATA TYPE= nD NMR SPECTRUM\n##DATA CLASS= NTUPLES\n"
      "##NUM DIM= 2\n##ORIGIN= lab\n##OWNER= lab\n##END=\n");
  ExpectRefused({"assess", flat}, flat, "dimension");

  ExpectRefused({"assess", Path("missing.jdx")}, Path("missing.jdx"), "no such file");
  fs::create_directories(Path("bare"));
  ExpectRefused({"assess", Path("bare")}, Path("bare"), "no files");

  // 500 MiB that take no room on the disk.
  const std::string large = Write("large.jdx", whole);
  fs::resize_file(large, std::uintmax_t{500} << 20);
  ExpectRefused({"assess", large}, large, "");
}

TEST_F(ClientBadInput, ValuesThatAreNoNumbers) {
  std::string text = Read(Write("night/a.jdx", Look(64)));
  for (const char* value : {"nan", "inf", "1e999"}) {
    const std::size_t factor = text.find("##FACTOR=");
    ASSERT_NE(factor, std::string::npos);
    std::string broken = text;
    broken.insert(broken.find('=', factor) + 1, std::string(" ") + value + ", ");
    const std::string file = Write(std::string("value-") + value + ".jdx", broken);
    ExpectRefused({"assess", file}, file, "");
  }
}

TEST_F(ClientBadInput, AFileThatLacksAFactNamesTheOption) {
  std::string text = Read(Write("night/a.jdx", Look(64)));
  const std::size_t label = text.find("##.AVERAGES");
  ASSERT_NE(label, std::string::npos);
  text.erase(label, text.find('\n', label) + 1 - label);
  const std::string file = Write("unsaid/a.jdx", text);
  ExpectRefused({"assess", file}, file, "--scans-done");
  EXPECT_EQ(Client({"assess", file, "--scans-done", "64"}).code, 0);
}

TEST_F(ClientBadInput, Goals) {
  const std::string file = Write("night/a.jdx", Look(64));
  for (const char* target : {"0", "-3", "nan", "inf", "ten"}) {
    ExpectRefused({"assess", file, "--target", target}, "--target", target, 2);
  }
  ExpectRefused({"assess", file, "--window", "105:95"}, "--window", "105:95", 2);
  ExpectRefused({"assess", file, "--window", "400:500"}, file, "400");
  ExpectRefused({"assess", file, "--lines", "2", "--window", "95:105"}, "--lines", "--window", 2);
}

TEST_F(ClientBadInput, CommandLines) {
  ExpectRefused({"assess"}, "FILE", "--help", 2);
  ExpectRefused({"frobnicate"}, "frobnicate", "--help", 2);
  ExpectRefused({}, "", "--help", 2);
  ExpectRefused({"assess", "--no-such-option", "x"}, "--no-such-option", "lastscan assess --help",
                2);
  ExpectRefused({"rehearse", "--scenario", "nonesuch"}, "nonesuch", "--scenario", 2);
  ExpectRefused({"page", "--listen", "nowhere"}, "--listen", "HOST:PORT", 2);
}

TEST_F(ClientBadInput, AnotherExperimentAmongTheFiles) {
  Write("night/a.jdx", Look(64));
  Write("night/b.jdx", Look(192));
  rehearsal::InventedSample other = Sample();
  other.points = 1024;
  const std::string wrong = Write("night/c.jdx", Look(128, other));
  const Finished run = Client({"assess", Path("night")});
  EXPECT_EQ(run.code, 1);
  EXPECT_TRUE(IsOneErrorLine(run.err));
  EXPECT_THAT(run.err, HasSubstr(wrong));
  // The rest is judged all the same.
  EXPECT_THAT(run.out, HasSubstr("192"));
}

TEST_F(ClientBadInput, NoDaemon) {
  const std::string file = Write("night/a.jdx", Look(64));
  const std::string where = (folder_ / "run/lastscan/request.sock").string();
  for (const std::vector<std::string>& line :
       std::vector<std::vector<std::string>>{{"feed", file},
                                             {"runs"},
                                             {"show", "night"},
                                             {"watch"},
                                             {"ledger"},
                                             {"retrace", file, "--feed"}}) {
    ExpectRefused(line, where, "start lastscand");
  }
  ExpectRefused({"runs", "--at", "ipc://" + Path("other.sock")}, Path("other.sock"), "--at");
  ExpectRefused({"runs", "--at", "nonsense"}, "nonsense", "--at");
}

TEST_F(ClientBadInput, TheDaemonRefusesAndStaysUp) {
  Running daemon = StartDaemon();
  rehearsal::InventedRun run(Sample(), 7);
  const std::string first = Write("first/a.jdx", run.AdvanceTo(64));
  const std::string second = Write("second/a.jdx", run.AdvanceTo(128));
  EXPECT_EQ(Client({"feed", second, "--run", "night"}).code, 0);
  const std::string before = Client({"show", "night", "--json"}).out;
  EXPECT_THAT(before, HasSubstr("\"scansDone\":\"128\""));

  // Scans going backwards.
  ExpectRefused({"feed", first, "--run", "night"}, first, "128");
  // Another experiment under the same name.
  rehearsal::InventedSample other = Sample();
  other.points = 1024;
  const std::string wrong = Write("third/a.jdx", Look(256, other));
  ExpectRefused({"feed", wrong, "--run", "night"}, wrong, "name");
  // A goal window outside the spectrum, for a new run.
  ExpectRefused({"feed", second, "--run", "new", "--window", "400:500"}, second, "400");
  ExpectRefused({"show", "new"}, "new", "");

  EXPECT_EQ(Client({"show", "night", "--json"}).out, before);
  // The same snapshot again is harmless.
  EXPECT_EQ(Client({"feed", second, "--run", "night"}).code, 0);
  EXPECT_EQ(daemon.Stop(SIGTERM).code, 0);
}

TEST_F(ClientBadInput, WrittenFilesAreNeverOverwritten) {
  const std::vector<std::string> line = {
      "retrace", Write("night/a.jdx", Look(64)), "--write", Path("looks"), "--looks", "2"};
  EXPECT_EQ(Client(line).code, 0);
  ExpectRefused(line, Path("looks"), "exists");
}

}  // namespace
}  // namespace lastscan::testing
