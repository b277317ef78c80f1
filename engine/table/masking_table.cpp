// engine/table/masking_table.cpp -- withholding in a table with margins.
//
// Margins are taken as one more row and column, with the opposite sign, so that every row and every column
// adds up to 0. A withheld cell can change by one exactly when it lies on a closed path of withheld cells,
// alternately in one row and one column, whose cells rise and fall in turn within their bounds. Where there
// is none, the cheapest one is made by keeping back more cells.
#include <array>
#include <cmath>
#include <functional>
#include <limits>
#include <optional>
#include <queue>
#include <utility>

#include "engine/refusal.hpp"
#include "engine/table/masking.hpp"
#include "engine/table/masking_checks.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

class Grid {
 public:
  Grid(std::span<const double> counts, std::size_t rows, std::size_t columns, double threshold)
      : rows_(rows),
        columns_(columns),
        threshold_(threshold),
        value_((rows + 1) * (columns + 1)),
        shown_(value_.size(), Shown::plain),
        on_path_(value_.size(), 0) {
    for (std::size_t r = 0; r <= rows; ++r)
      for (std::size_t c = 0; c <= columns; ++c) {
        if (r < rows && c < columns) value(r, c) = counts[r * columns + c];
        const double own = value(r, c);
        if (std::isnan(own)) continue;
        if (c < columns) value(r, columns) += own;
        if (r < rows) value(rows, c) += own;
      }
    // The corner has been filled from both margins.
    value(rows, columns) = 0;
    for (std::size_t r = 0; r < rows; ++r) value(rows, columns) += value(r, columns);
    for (std::size_t r = 0; r <= rows; ++r)
      for (std::size_t c = 0; c <= columns; ++c)
        if (value(r, c) < threshold) shown(r, c) = Shown::small;
  }

  Shown& shown(std::size_t r, std::size_t c) { return shown_[r * (columns_ + 1) + c]; }

  /// Puts every withheld cell on a closed path; false if one cannot be.
  bool protect() {
    bool all = true;
    for (std::size_t r = 0; r <= rows_; ++r)
      for (std::size_t c = 0; c <= columns_; ++c)
        if (shown(r, c) == Shown::small && !on_path_[r * (columns_ + 1) + c] && !open(r, c)) all = false;
    return all;
  }

 private:
  double& value(std::size_t r, std::size_t c) { return value_[r * (columns_ + 1) + c]; }
  bool margin(std::size_t r, std::size_t c) const { return (r == rows_) != (c == columns_); }

  // Whether a cell may rise (+1) or fall (-1); in a margin the signed value moves the other way.
  bool may_move(std::size_t r, std::size_t c, int signed_step) {
    const double own = value(r, c), step = margin(r, c) ? -signed_step : signed_step;
    if (std::isnan(own)) return false;
    return own < threshold_ ? own + step >= 0 && own + step < threshold_ : own + step >= threshold_;
  }

  double cost(std::size_t r, std::size_t c) {
    constexpr double few = 1e-6;  // a longer path of cells already withheld is not quite free
    if (shown(r, c) != Shown::plain) return few;
    const double size = value(r, c) / (1 + value(rows_, columns_));
    if (r == rows_ && c == columns_) return 1e6;
    return margin(r, c) ? 1000 + size : 1 + size;
  }

  struct Path {
    double cost = infinity;
    std::vector<std::pair<std::size_t, std::size_t>> cells;
  };

  // The cheapest way from column c back to row r, not by the cell itself, once that has moved by `step`.
  Path way_back(std::size_t r, std::size_t c, int step, double bound) {
    const std::size_t nodes = rows_ + columns_ + 2, first_column = rows_ + 1;
    std::vector<double> distance(nodes, infinity);
    std::vector<std::size_t> from(nodes, nodes);
    using Entry = std::pair<double, std::size_t>;
    std::priority_queue<Entry, std::vector<Entry>, std::greater<>> next;
    distance[first_column + c] = 0;
    next.emplace(0, first_column + c);
    while (!next.empty()) {
      const auto [so_far, node] = next.top();
      next.pop();
      if (so_far > distance[node] || so_far >= bound) continue;
      if (node == r) break;
      const bool at_column = node >= first_column;
      const std::size_t ends = at_column ? rows_ + 1 : columns_ + 1;
      for (std::size_t k = 0; k < ends; ++k) {
        const std::size_t row = at_column ? k : node, column = at_column ? node - first_column : k;
        if (row == r && column == c) continue;
        if (!may_move(row, column, at_column ? -step : step)) continue;
        const std::size_t there = at_column ? row : first_column + column;
        const double total = so_far + cost(row, column);
        if (!(total < distance[there])) continue;
        distance[there] = total;
        from[there] = node;
        next.emplace(total, there);
      }
    }
    Path path;
    if (std::isinf(distance[r])) return path;
    path.cost = distance[r];
    for (std::size_t node = r; node != first_column + c; node = from[node]) {
      const std::size_t other = from[node];
      path.cells.emplace_back(std::min(node, other), std::max(node, other) - first_column);
    }
    return path;
  }

  bool open(std::size_t r, std::size_t c) {
    Path best;
    for (const int step : {1, -1}) {
      if (!may_move(r, c, step)) continue;
      Path path = way_back(r, c, step, best.cost);
      if (path.cost < best.cost) best = std::move(path);
    }
    if (std::isinf(best.cost)) return false;
    for (const auto& [row, column] : best.cells) {
      if (shown(row, column) == Shown::plain) shown(row, column) = Shown::kept_back;
      on_path_[row * (columns_ + 1) + column] = 1;
    }
    return true;
  }

  std::size_t rows_, columns_;
  double threshold_;
  std::vector<double> value_;
  std::vector<Shown> shown_;
  std::vector<char> on_path_;  ///< known to lie on a closed path
};

}  // namespace

MaskedTable mask_table(std::span<const double> counts, std::size_t rows, std::size_t columns,
                       double threshold) {
  constexpr std::size_t most_cells = 1'000'000;
  require_threshold(threshold);
  require_counts(counts);
  if (columns != 0 && rows > most_cells / columns)
    throw Refusal(Code::too_large, "The table has too many cells to be masked.");
  if (counts.size() != rows * columns)
    throw Refusal(Code::length_mismatch, "The table's cells are not rows times columns.");
  Grid grid(counts, rows, columns, threshold);
  MaskedTable table;
  table.safe = grid.protect();
  for (std::size_t r = 0; r < rows; ++r) {
    for (std::size_t c = 0; c < columns; ++c) table.cells.push_back(grid.shown(r, c));
    table.row_totals.push_back(grid.shown(r, columns));
  }
  for (std::size_t c = 0; c < columns; ++c) table.column_totals.push_back(grid.shown(rows, c));
  table.grand_total = grid.shown(rows, columns);
  return table;
}

}  // namespace countsel
