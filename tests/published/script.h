// Runs the Python scripts of this folder, which compute with SciPy what the
// engine computes, and reads what they print.
#pragma once

#include <string>
#include <vector>

namespace lastscan::published {

// A number as a script's argument, to full precision.
std::string Argument(double value);

// Standard output of `script`, a file of this folder, run with `arguments` by
// the system's Python. Throws std::runtime_error when it fails; what it says
// about that goes to standard error.
std::string OutputOf(const std::string& script, const std::vector<std::string>& arguments);

// The numbers that scipy_values.py prints for `function`, one a line. Throws
// std::runtime_error when it fails or prints anything else.
std::vector<double> SciPy(const std::string& function, const std::vector<std::string>& arguments);

// The same for arguments that are all numbers.
std::vector<double> SciPy(const std::string& function, const std::vector<double>& arguments);

}  // namespace lastscan::published
