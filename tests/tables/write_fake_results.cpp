#include <exception>
#include <iostream>

#include "fake_results.h"

/// Writes results of made-up acquisitions into the folder given, to be read by other programs.
int main(int count, char** arguments) {
  if (count != 2) {
    std::cerr << "usage: write_fake_results FOLDER\n";
    return 2;
  }
  try {
    wavefount::Messages messages;
    wavefount::fake::write_results(arguments[1], messages);
  } catch (const std::exception& problem) {
    std::cerr << problem.what() << '\n';
    return 1;
  }
  return 0;
}
