#include "published/script.h"

#include <array>
#include <cstdio>
#include <sstream>
#include <stdexcept>

namespace lastscan::published {
namespace {

std::string Quoted(const std::string& argument) {
  std::string quoted = "'";
  for (char c : argument) {
    if (c == '\'') {
      quoted += "'\\''";
    } else {
      quoted.push_back(c);
    }
  }
  return quoted + "'";
}

}  // namespace

std::string Argument(double value) {
  char text[40];
  std::snprintf(text, sizeof text, "%.17g", value);
  return text;
}

std::string OutputOf(const std::string& script, const std::vector<std::string>& arguments) {
  // Debian's Python by its full path: it is the one that has Debian's SciPy.
  std::string line =
      "/usr/bin/python3 " + Quoted(std::string(LASTSCAN_SOURCE_DIR) + "/tests/published/" + script);
  for (const std::string& argument : arguments) line += " " + Quoted(argument);
  FILE* pipe = popen(line.c_str(), "r");
  if (pipe == nullptr) throw std::runtime_error("cannot start: " + line);
  std::string output;
  std::array<char, 4096> buffer;
  std::size_t count = 0;
  while ((count = fread(buffer.data(), 1, buffer.size(), pipe)) > 0) {
    output.append(buffer.data(), count);
  }
  if (pclose(pipe) != 0) throw std::runtime_error("failed: " + line);
  return output;
}

std::vector<double> SciPy(const std::string& function, const std::vector<std::string>& arguments) {
  std::vector<std::string> all = {function};
  all.insert(all.end(), arguments.begin(), arguments.end());
  std::istringstream output(OutputOf("scipy_values.py", all));
  std::vector<double> values;
  std::string line;
  while (std::getline(output, line)) {
    std::size_t used = 0;
    values.push_back(std::stod(line, &used));
    if (used != line.size()) throw std::runtime_error(function + " printed: " + line);
  }
  return values;
}

std::vector<double> SciPy(const std::string& function, const std::vector<double>& arguments) {
  std::vector<std::string> texts;
  for (double argument : arguments) texts.push_back(Argument(argument));
  return SciPy(function, texts);
}

}  // namespace lastscan::published
