#include "check_command.h"

#include <cstdio>

#include "pipeline.h"
#include "wavefount/acquisition/listing.h"
#include "wavefount/acquisition/open_film.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

constexpr int nothing_wrong = 0;
constexpr int some_unusable = 1;
constexpr int cannot_start = 2;

bool check_film(const FoundFilm& film, const ChannelRoles& roles) {
  std::printf("\n%s\n", film.name.c_str());
  try {
    if (!film.problem.empty()) throw Problem(film.problem);
    const auto source = open_film(film, roles);
    for (const auto& sentence : understood(source->description()))
      std::printf("  %s\n", sentence.c_str());
    return true;
  } catch (const std::exception& error) {
    std::printf("  cannot be used: %s\n", error.what());
    return false;
  }
}

int check_folder(const std::filesystem::path& folder, const PipelineFile& file) {
  const ChannelRoles roles{file.reporter, file.brightfield, file.field};
  const auto listing = list_films(folder);
  for (const auto& message : listing.messages) std::printf("%s\n", message.c_str());
  int unusable = 0;
  for (const auto& film : listing.films) unusable += check_film(film, roles) ? 0 : 1;
  std::printf("\n%zu acquisitions, %d of them cannot be used.\n", listing.films.size(), unusable);
  return unusable == 0 ? nothing_wrong : some_unusable;
}

}  // namespace

int check(const std::filesystem::path& pipeline, const std::optional<std::filesystem::path>& folder,
          const StepRegistry& registry) {
  const auto file = read_pipeline_file(pipeline);
  const auto faults = faults_of(file, registry);
  for (const auto& fault : faults) std::printf("%s\n", fault.c_str());
  if (!faults.empty()) return cannot_start;
  std::printf("The pipeline '%s' (%s) can run: %zu steps fit together.\n", file.name.c_str(),
              pipeline.c_str(), file.steps.size());
  return folder ? check_folder(*folder, file) : nothing_wrong;
}

}  // namespace wavefount
