#include "outline_path.h"

#include <map>
#include <set>
#include <utility>

namespace wavefount {
namespace {

using Corner = std::pair<int, int>;  // x, y of a pixel's corner; pixel x spans corners x to x + 1

struct Sides {
  std::multimap<Corner, Corner> next;  ///< from corner to corner, the pixels on the right

  void add(Corner from, Corner to) { next.emplace(from, to); }
};

/// Sides of pixels that have no neighbour across, clockwise in image coordinates.
Sides border_of(const std::vector<Run>& runs) {
  std::set<Corner> pixels;
  for (const auto& run : runs)
    for (int x = run.x0; x < run.x1; ++x) pixels.emplace(x, run.y);
  Sides sides;
  for (const auto& [x, y] : pixels) {
    if (!pixels.contains({x, y - 1})) sides.add({x, y}, {x + 1, y});
    if (!pixels.contains({x + 1, y})) sides.add({x + 1, y}, {x + 1, y + 1});
    if (!pixels.contains({x, y + 1})) sides.add({x + 1, y + 1}, {x, y + 1});
    if (!pixels.contains({x - 1, y})) sides.add({x, y + 1}, {x, y});
  }
  return sides;
}

/// Takes one loop out of the sides.
std::vector<Corner> next_loop(Sides& sides) {
  std::vector<Corner> loop;
  auto side = sides.next.begin();
  const Corner start = side->first;
  while (side != sides.next.end()) {
    const Corner to = side->second;
    loop.push_back(side->first);
    sides.next.erase(side);
    if (to == start) break;
    side = sides.next.find(to);
  }
  return loop;
}

}  // namespace

void add_outline(Canvas& canvas, const std::vector<Run>& runs,
                 const std::function<Point(Point)>& on_canvas) {
  auto sides = border_of(runs);
  while (!sides.next.empty()) {
    const auto loop = next_loop(sides);
    cairo_new_sub_path(canvas.cairo());
    for (std::size_t i = 0; i < loop.size(); ++i) {
      const auto& [x, y] = loop[i];
      const auto& [next_x, next_y] = loop[(i + 1) % loop.size()];
      const Point at = on_canvas({(x + next_x - 1) / 2.0, (y + next_y - 1) / 2.0});
      cairo_line_to(canvas.cairo(), at.x, at.y);
    }
    cairo_close_path(canvas.cairo());
  }
}

}  // namespace wavefount
