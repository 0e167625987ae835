#include "wavefount/waves/answer.h"

#include <algorithm>
#include <cmath>

#include "wavefount/core/text.h"

namespace wavefount {
namespace {

constexpr std::size_t least_timed = 5;

bool in_order(const Findings& findings, const OriginRules& rules) {
  const auto& candidates = findings.candidates;
  return candidates.visible_probability >= rules.visible_probability &&
         candidates.range_min > findings.finest_min;
}

/// Candidates more likely than not.
int named(const Candidates& candidates) {
  return static_cast<int>(
      std::count_if(candidates.found.begin(), candidates.found.end(),
                    [](const Candidate& one) { return one.probability >= 0.5; }));
}

bool over_gap(const Candidates& candidates) {
  return std::any_of(candidates.found.begin(), candidates.found.end(),
                     [](const Candidate& one) { return one.probability >= 0.5 && one.behind_gap; });
}

std::string percent(double share) {
  return std::to_string(std::lround(100 * share)) + " %";
}

/// Gathers reasons; a wave's answer alone may put it in the queue.
class Reasons {
 public:
  explicit Reasons(Wave& wave) : wave_(wave) {}

  void queue(const std::string& reason, const std::string& detail) {
    note(reason, detail);
    wave_.review = true;
  }
  void note(const std::string& reason, const std::string& detail) {
    wave_.reasons.push_back(reason);
    wave_.reason_details.push_back(detail);
  }

 private:
  Wave& wave_;
};

void add_ambiguity(Reasons& reasons, const Findings& findings) {
  const auto& candidates = findings.candidates;
  if (candidates.found.empty()) return reasons.queue("no-origin", "No place leads often enough.");
  const auto& first = candidates.found.front();
  const bool several = candidates.found.size() > 1 && candidates.found[1].probability >= 0.1;
  if (several && first.probability < 0.9)
    return reasons.queue("which-led", "The likeliest place leads with a probability of only " +
                                          percent(first.probability) + ".");
  if (several)
    return reasons.queue("how-many", "A second origin has a probability of " +
                                         percent(candidates.found[1].probability) + ".");
  reasons.queue("weak-origin", "One origin alone has a probability of only " +
                                   percent(candidates.alone_probability) + ".");
}

double badly_timed_share(const Wave& wave, const WaveEntries& entries, double range_min) {
  double badly = 0;
  for (const int at : wave.entries)
    if (4 * entries.entries[at].se_min > range_min) badly += 1;
  return badly / static_cast<double>(wave.entries.size());
}

void add_weakness(Reasons& reasons, const Wave& wave, const WaveEntries& entries,
                  const Findings& findings) {
  constexpr std::size_t few = 8;
  if (findings.timed < few)
    reasons.queue("few-nuclei",
                  "The answer rests on " + std::to_string(findings.timed) + " timed nuclei.");
  constexpr double many = 0.25;
  const double badly = badly_timed_share(wave, entries, findings.candidates.range_min);
  if (badly > many)
    reasons.queue("badly-timed", "For " + percent(badly) +
                                     " of the nuclei the entry time is less certain than a "
                                     "quarter of the wave's duration.");
}

/// Nuclei lost shortly before or in the wave near a claimed origin are missing from the answer.
void add_doubts_about_evidence(Reasons& reasons, const Findings& findings) {
  if (findings.number_doubtful)
    reasons.queue("cycle-number",
                  "Neighbours differ by about half a period or contradict one another, so which "
                  "entries are one mitosis is not certain.");
  if (findings.began_before_film)
    reasons.queue("began-before-film",
                  "The first entries lie at the start of the film beside nuclei whose entry was "
                  "not seen, so the wave may have begun earlier.");
  if (over_gap(findings.candidates))
    reasons.queue("gap",
                  "Between two early places lies a stretch without nuclei, over which one may "
                  "have triggered the other.");
}

}  // namespace

Answer answer_of(const Findings& findings, const OriginRules& rules) {
  if (findings.timed < least_timed) return Answer::too_few;
  const bool ordered = in_order(findings, rules);
  if (!ordered && findings.spread_min <= findings.scatter_min) return Answer::synchronous;
  if (!ordered && findings.order_p > rules.order_p) return Answer::incoherent;
  const auto& candidates = findings.candidates;
  if (candidates.entering_probability >= 0.5) return Answer::enters_view;
  const bool certain =
      !findings.number_doubtful && !findings.began_before_film && !over_gap(candidates);
  const double in_view = 1 - candidates.entering_probability;
  if (!certain || in_view < rules.claim_probability) return Answer::ambiguous;
  if (named(candidates) >= 2 && candidates.joint_probability >= rules.claim_probability)
    return Answer::coexisting;
  if (candidates.alone_probability >= rules.claim_probability) return Answer::single;
  return Answer::ambiguous;
}

void add_reasons(Wave& wave, const WaveEntries& entries, const Findings& findings) {
  Reasons reasons(wave);
  if (wave.fate == Fate::terminal)
    reasons.queue("terminal",
                  "Most nuclei did not form again: arrest or death rather than mitosis.");
  const bool settled = wave.answer == Answer::synchronous || wave.answer == Answer::enters_view ||
                       wave.answer == Answer::too_few;
  if (settled) {
    reasons.note(name_of(wave.answer), "Settled; nothing to decide.");
    return;
  }
  add_doubts_about_evidence(reasons, findings);
  if (wave.answer == Answer::ambiguous) add_ambiguity(reasons, findings);
  if (wave.answer == Answer::incoherent)
    reasons.queue("incoherent",
                  "Entry times spread beyond their errors but neighbours are not "
                  "alike (permutation p = " +
                      rounded_text(findings.order_p, 2) + ").");
  if (wave.answer == Answer::coexisting)
    reasons.queue("coexisting", "Several origins together have a probability of " +
                                    percent(findings.candidates.joint_probability) + ".");
  add_weakness(reasons, wave, entries, findings);
}

}  // namespace wavefount
