#include "wavefount/core/problem.h"

namespace wavefount {

Problem::~Problem() = default;

}  // namespace wavefount
