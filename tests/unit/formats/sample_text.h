// Small JCAMP-DX texts for the tests of client/formats, and the way to look at a refusal.
#pragma once

#include <functional>
#include <string>

#include "formats/recording.h"

namespace lastscan::formats {

// The message of the Unreadable that `action` throws; empty if it throws none.
inline std::string RefusalOf(const std::function<void()>& action) {
  try {
    action();
  } catch (const Unreadable& refusal) {
    return refusal.what();
  }
  return {};
}

// A spectrum of five points, 10 Hz apart, from 1020 Hz down to 980 Hz. `more` are
// further records, `axis` and `table` replace the ones below.
struct SpectrumText {
  std::string kind = "NMR SPECTRUM";
  std::string more = "##.AVERAGES= 16\n";
  std::string frequency = "##.OBSERVE FREQUENCY= 100\n";
  std::string axis =
      "##XUNITS= HZ\n##FIRSTX= 1020\n##LASTX= 980\n##DELTAX= -10\n##XFACTOR= 1\n"
      "##YFACTOR= 0.5\n##NPOINTS= 5\n";
  std::string table = "##XYDATA= (X++(Y..Y))\n1020 2 4 6\n990 8 -10\n";
  std::string end = "##END=\n";

  std::string str() const {
    return "##TITLE= invented sample\n##JCAMP-DX= 5.01\n##DATA TYPE= " + kind +
           "\n##DATA CLASS= XYDATA\n" + frequency + "##.OBSERVE NUCLEUS= ^13C\n" + more + axis +
           table + end;
  }
};

// An FID of four complex points, 1 ms apart: 1-5i, 2-6i, 3-7i, 4-8i.
struct FidText {
  std::string more = "##.AVERAGES= 16\n";
  std::string variables =
      "##VAR_NAME= TIME, FID/REAL, FID/IMAG\n##SYMBOL= X, R, I\n"
      "##VAR_TYPE= INDEPENDENT, DEPENDENT, DEPENDENT\n##VAR_FORM= AFFN, ASDF, ASDF\n";
  std::string size = "##VAR_DIM= 4, 4, 4\n";
  std::string units = "##UNITS= SECONDS, ARBITRARY UNITS, ARBITRARY UNITS\n";
  std::string span = "##FIRST= 0, 1, -5\n##LAST= 0.003, 4, -8\n##FACTOR= 0.001, 1, 1\n";
  std::string real = "##PAGE= N=1\n##DATA TABLE= (X++(R..R)), XYDATA\n0AJJJ\n3D\n";
  std::string imaginary = "##PAGE= N=2\n##DATA TABLE= (X++(I..I)), XYDATA\n0ejU\n3h\n";
  std::string end = "##END NTUPLES= NMR FID\n##END=\n";

  std::string str() const {
    return "##TITLE= invented sample\n##JCAMP-DX= 5.01\n##DATA TYPE= NMR FID\n"
           "##DATA CLASS= NTUPLES\n##.OBSERVE FREQUENCY= 100\n##.OBSERVE NUCLEUS= ^13C\n" +
           more + "##NTUPLES= NMR FID\n" + variables + size + units + span + real + imaginary + end;
  }
};

}  // namespace lastscan::formats
