#pragma once

#include <vector>

namespace wavefount::tube {

/// Whittaker's smoother (Whittaker 1923; Eilers 2003): least squares plus a penalty on second
/// differences. Waves of `cutoff` samples are halved, longer ones kept. Samples of weight 0 are
/// filled in. Same length out; needs at least one positive weight, else zeros come back.
std::vector<double> smooth(const std::vector<double>& values, const std::vector<double>& weights,
                           double cutoff);

/// The same with Tukey's biweight on the residuals, so that debris and bubbles drop out. `weights`
/// comes back as used, 0 for what was dropped.
std::vector<double> smooth_robust(const std::vector<double>& values, std::vector<double>& weights,
                                  double cutoff);

}  // namespace wavefount::tube
