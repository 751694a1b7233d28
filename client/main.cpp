// lastscan: the client of lastscand.
#include "commands/command.h"

int main(int argc, char** argv) { return lastscan::commands::RunCommandLine(argc, argv); }
