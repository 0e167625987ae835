#pragma once

#include <cstddef>

#include "tiff_page.h"

namespace wavefount {

/// Converts `rows` rows of `columns` stored samples each to float; a stored row starts on a byte.
/// `row_stride`: stored bytes from row to row. `out_stride`: floats from row to row. `swap`: the
/// bytes of a sample are in the other order than this machine's.
void convert_samples(const TiffPage& page, const unsigned char* stored, std::size_t row_stride,
                     int columns, int rows, bool swap, float* out, std::size_t out_stride);

/// Turns MinIsWhite values, stored as largest value minus brightness, into brightness.
void invert(const TiffPage& page, float* pixels, std::size_t count);

}  // namespace wavefount
