#pragma once

#include <optional>
#include <vector>

#include "fields.h"
#include "wavefount/core/wave.h"

namespace wavefount {

/// The columns of slowness and speed, the same for a wave and for one of its arms. `slowness_of`
/// gives the row's slowness, empty where none was fitted.
template <class Row>
std::vector<Field<Row>> slowness_fields(
    std::function<std::optional<Slowness>(const Row&)> slowness_of) {
  const auto value = [slowness_of](auto Slowness::*member) {
    return [slowness_of, member](const Row& row) {
      const auto slowness = slowness_of(row);
      return slowness ? number_cell((*slowness).*member) : Cell();
    };
  };
  return {
      {number_column("slowness_min_per_um", "Slowness (minutes per micrometre)", 5,
                     "Delay of mitotic entry for each micrometre along the way of the wave."),
       value(&Slowness::min_per_um)},
      {number_column("slowness_se_min_per_um", "Slowness, standard error (minutes per micrometre)",
                     5, "Standard error of the slowness, jitter of nuclei included."),
       value(&Slowness::se_min_per_um)},
      {number_column("speed_um_per_min", "Speed (micrometres per minute)", 1,
                     "Inverse of the slowness; empty when the wave is too fast to be told from "
                     "one that is everywhere at once."),
       value(&Slowness::speed_um_per_min)},
      {number_column("speed_lo_um_per_min", "Speed, lower limit (micrometres per minute)", 1,
                     "Lower end of the 95 % interval of the speed."),
       value(&Slowness::speed_lo_um_per_min)},
      {number_column("speed_hi_um_per_min", "Speed, upper limit (micrometres per minute)", 1,
                     "Upper end of the 95 % interval of the speed; empty when there is no upper "
                     "limit."),
       value(&Slowness::speed_hi_um_per_min)},
  };
}

}  // namespace wavefount
