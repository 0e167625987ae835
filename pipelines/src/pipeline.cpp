#include "pipeline.h"

#include <set>

#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

/// Records that the engine itself makes.
const char* const film_record = "film";
const char* const observations_record = "observations";
const char* const tube_record = "tube";

std::string place_of(const PipelineFile& file, const DeclaredStep& step) {
  return file.path.string() + ", line " + std::to_string(step.line) + ": ";
}

/// Who could have made a record, for the advice.
std::string maker_of(const std::string& record, const StepRegistry& registry) {
  for (const auto& name : registry.names()) {
    for (const auto& made : registry.make(name)->declaration().makes) {
      if (made == record) return name;
    }
  }
  return {};
}

class FaultFinder {
 public:
  FaultFinder(const PipelineFile& file, const StepRegistry& registry)
      : file_(file), registry_(registry), made_({film_record}) {}

  std::vector<std::string> find() {
    for (const auto& declared : file_.steps) look_at(declared);
    return faults_;
  }

 private:
  void look_at(const DeclaredStep& declared) {
    try {
      const auto step = registry_.make(declared.name);
      check_order(declared, step->declaration());
      check_needs(declared, step->declaration());
      for (const auto& record : step->declaration().makes) made_.insert(record);
      step->configure(declared.parameters);
    } catch (const Problem& problem) {
      faults_.push_back(place_of(file_, declared) + problem.what());
    }
    if (!names_.insert(declared.name).second)
      faults_.push_back(place_of(file_, declared) + "the step '" + declared.name +
                        "' stands twice; name each step once.");
  }

  void check_order(const DeclaredStep& declared, const StepDeclaration& step) {
    const auto fault = [&](const std::string& text) {
      faults_.push_back(place_of(file_, declared) + "the step '" + step.name + "' " + text);
    };
    if (step.scope == Scope::frame) {
      if (stage_ == Stage::after) fault("works on frames; move it up to the other frame steps.");
      if (stage_ == Stage::folder) fault("works on frames; move it before the folder steps.");
      if (stage_ == Stage::before) stage_ = Stage::stream;
    } else if (step.scope == Scope::acquisition) {
      if (stage_ == Stage::folder) fault("works on one acquisition; move it before folder steps.");
      if (stage_ == Stage::stream) {
        stage_ = Stage::after;
        made_.insert({observations_record, tube_record});
      }
    } else {
      stage_ = Stage::folder;
    }
  }

  void check_needs(const DeclaredStep& declared, const StepDeclaration& step) {
    for (const auto& need : step.needs) {
      if (made_.contains(need)) continue;
      const auto maker = maker_of(need, registry_);
      faults_.push_back(place_of(file_, declared) + "the step '" + step.name + "' needs '" + need +
                        "', which no earlier step makes" +
                        (maker.empty() ? "." : "; put '- " + maker + "' before it."));
    }
  }

  enum class Stage { before, stream, after, folder };

  const PipelineFile& file_;
  const StepRegistry& registry_;
  std::set<std::string> made_;
  std::set<std::string> names_;
  std::vector<std::string> faults_;
  Stage stage_ = Stage::before;
};

template <class Kind>
typename Kind::Pointer as(const Step::Pointer& step) {
  auto* kind = dynamic_cast<Kind*>(step.GetPointer());
  if (kind == nullptr)
    throw Problem("The step '" + step->declaration().name + "' is not of the scope it declares.");
  return kind;
}

}  // namespace

std::vector<std::string> faults_of(const PipelineFile& file, const StepRegistry& registry) {
  return FaultFinder(file, registry).find();
}

Pipeline make_pipeline(const PipelineFile& file, const StepRegistry& registry) {
  if (const auto faults = faults_of(file, registry); !faults.empty()) throw Problem(faults.front());
  Pipeline pipeline{file, {}, {}, {}, {}};
  for (const auto& declared : file.steps) {
    const auto step = registry.make(declared.name);
    step->configure(declared.parameters);
    switch (step->declaration().scope) {
      case Scope::frame:
        pipeline.stream.push_back(as<FrameStep>(step));
        break;
      case Scope::acquisition:
        (pipeline.stream.empty() ? pipeline.before : pipeline.after)
            .push_back(as<AcquisitionStep>(step));
        break;
      case Scope::folder:
        pipeline.folder.push_back(as<FolderStep>(step));
        break;
    }
  }
  return pipeline;
}

}  // namespace wavefount
