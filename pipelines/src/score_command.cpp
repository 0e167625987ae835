#include "score_command.h"

#include <CLI/CLI.hpp>
#include <cstdio>
#include <iostream>
#include <memory>
#include <string>

#include "wavefount/synthetic/score.h"

namespace wavefount {
namespace {

struct ScoreWords {
  std::string results, truth, csv;
  bool json = false;
};

}  // namespace

void add_score_command(CLI::App& app, int& status) {
  auto* command = app.add_subcommand("score", "hold results against the truth of demo films");
  auto words = std::make_shared<ScoreWords>();
  command->add_option("results", words->results, "folder that `run` wrote")->required();
  command->add_option("truth", words->truth, "folder truth/ that `demo` wrote")->required();
  command->add_option("--csv", words->csv, "also write the figures of each film to this file");
  command->add_flag("--json", words->json, "print JSON instead of text");
  command->callback([words, &status] {
    const auto report = score_results(words->results, words->truth);
    if (words->json)
      std::puts(score_json(report).c_str());
    else
      print(report, std::cout);
    if (!words->csv.empty()) write_score_csv(report, words->csv);
    status = 0;
  });
}

}  // namespace wavefount
