#include <CLI/CLI.hpp>
#include <cstdio>
#include <cstdlib>

#include "check_command.h"
#include "demo_command.h"
#include "run_command.h"
#include "score_command.h"
#include "step_catalogue.h"
#include "step_registry.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/version.h"

namespace {

constexpr int cannot_start = 2;

using wavefount::StepRegistry;

/// Plug-ins are opened only for the commands that use them.
class Plugins {
 public:
  explicit Plugins(CLI::App& app) {
    app.add_option("--plugins", folders_,
                   "more folders with plug-ins (also: WAVEFOUNT_PLUGINS, separated by colons)");
  }

  StepRegistry open() const {
    StepRegistry registry;
    registry.open_folders(wavefount::plugin_folders({folders_.begin(), folders_.end()}));
    for (const auto& refusal : registry.refusals()) std::fprintf(stderr, "%s\n", refusal.c_str());
    return registry;
  }

 private:
  std::vector<std::string> folders_;
};

void add_run(CLI::App& app, int& status) {
  auto* command = app.add_subcommand("run", "measure a folder of films");
  auto options = std::make_shared<wavefount::RunOptions>();
  auto plugins = std::make_shared<Plugins>(*command);
  command->add_option("pipeline", options->pipeline, "pipeline file (.yaml)")->required();
  command->add_option("folder", options->films, "folder with the films")->required();
  command->add_option("--out", options->output, "folder for the results")->required();
  command->add_option("--jobs", options->jobs, "threads in all (default: one a core)")
      ->check(CLI::Range(1, 1024));
  command->add_option("--only", options->only, "measure only these acquisitions");
  command->add_flag("--again", options->again, "measure again what is done already");
  command->callback(
      [options, plugins, &status] { status = wavefount::run_folder(*options, plugins->open()); });
}

void add_check(CLI::App& app, int& status) {
  auto* command = app.add_subcommand("check", "say what can be known before any pixel is read");
  auto plugins = std::make_shared<Plugins>(*command);
  auto pipeline = std::make_shared<std::string>();
  auto folder = std::make_shared<std::string>();
  command->add_option("pipeline", *pipeline, "pipeline file (.yaml)")->required();
  command->add_option("folder", *folder, "folder with the films");
  command->callback([=, &status] {
    std::optional<std::filesystem::path> films;
    if (!folder->empty()) films = *folder;
    status = wavefount::check(*pipeline, films, plugins->open());
  });
}

void add_steps(CLI::App& app) {
  auto* command = app.add_subcommand("steps", "list the steps a pipeline can name");
  auto plugins = std::make_shared<Plugins>(*command);
  auto names = std::make_shared<std::vector<std::string>>();
  auto json = std::make_shared<bool>(false);
  auto schema = std::make_shared<bool>(false);
  auto markdown = std::make_shared<bool>(false);
  command->add_option("step", *names, "only these steps");
  command->add_flag("--json", *json, "as JSON");
  command->add_flag("--schema", *schema, "JSON Schema of pipeline files")->excludes("--json");
  command->add_flag("--markdown", *markdown, "as a Markdown table")
      ->excludes("--json")
      ->excludes("--schema");
  command->callback([=] {
    const auto registry = plugins->open();
    const auto text = *json       ? wavefount::steps_as_json(registry, *names)
                      : *schema   ? wavefount::pipeline_schema(registry)
                      : *markdown ? wavefount::steps_as_markdown(registry)
                                  : wavefount::steps_as_text(registry, *names);
    std::fputs(text.c_str(), stdout);
  });
}

int run_program(int count, char** words) {
  CLI::App app(
      "Wavefount: which nucleus, or which stretch of tube, set off each mitotic wave.\n"
      "Research use only, not for diagnosis.");
  app.set_version_flag("--version", "wavefount " WAVEFOUNT_VERSION);
  app.require_subcommand(1);
  int status = 0;
  add_run(app, status);
  add_check(app, status);
  add_steps(app);
  wavefount::add_demo_command(app, status);
  wavefount::add_score_command(app, status);
  try {
    app.parse(count, words);
  } catch (const CLI::Success& asked) {
    return app.exit(asked);
  } catch (const CLI::ParseError& error) {
    app.exit(error);
    return cannot_start;
  }
  return status;
}

}  // namespace

int main(int count, char** words) {
  // ITK would open whatever lies in this path on first use, without the checks of our loader.
  unsetenv("ITK_AUTOLOAD_PATH");
  try {
    return run_program(count, words);
  } catch (const wavefount::Problem& problem) {
    std::fprintf(stderr, "%s\n", problem.what());
  } catch (const std::exception& error) {
    std::fprintf(stderr, "Wavefount stopped with an unforeseen error (%s); please report it.\n",
                 error.what());
  }
  return cannot_start;
}
