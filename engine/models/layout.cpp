// engine/models/layout.cpp -- which level columns share a code, which products share a dense column.
#include "engine/models/layout.hpp"

#include <algorithm>
#include <map>
#include <unordered_map>

#include "engine/models/levels.hpp"

namespace countsel {
namespace {

/// Joining stops where the table of sums would leave the nearer caches.
constexpr std::size_t most_joint_levels = 2048;

std::size_t level_count(const Design& design, const std::vector<std::size_t>& factors) {
  std::size_t count = 1;
  for (const std::size_t f : factors) {
    count *= design.columns[f].levels->size();
    if (count > most_joint_levels) return most_joint_levels + 1;
  }
  return count;
}

std::vector<std::size_t> united(std::vector<std::size_t> a, const std::vector<std::size_t>& b) {
  for (const std::size_t f : b)
    if (std::find(a.begin(), a.end(), f) == a.end()) a.push_back(f);
  return a;
}

bool contains(const std::vector<std::size_t>& all, const std::vector<std::size_t>& some) {
  return united(all, some).size() == all.size();
}

/// Crosses first, so that their columns end up together and the cross itself costs nothing.
std::vector<std::vector<std::size_t>> group_factors(const Design& design) {
  std::vector<std::vector<std::size_t>> wanted, groups;
  for (const TermColumns& term : design.terms)
    if (!term.factors.empty() && term.size() > 0) wanted.push_back(term.factors);
  std::stable_sort(wanted.begin(), wanted.end(),
                   [](const auto& a, const auto& b) { return a.size() > b.size(); });
  for (const auto& factors : wanted) {
    bool placed = false;
    for (const auto& group : groups) placed |= contains(group, factors);
    for (auto& group : groups) {
      if (placed) break;
      const auto both = united(group, factors);
      if (level_count(design, both) > most_joint_levels) continue;
      group = both;
      placed = true;
    }
    if (!placed) groups.push_back(factors);
  }
  return groups;
}

Group make_group(const Design& design, const std::vector<std::size_t>& factors) {
  Group group;
  group.factors = factors;
  if (factors.size() == 1) {
    const SourceColumn& column = design.columns[factors[0]];
    group.codes = column.codes;
    for (std::size_t code = 0; code < column.levels->size(); ++code)
      group.tuples.push_back({static_cast<std::int32_t>(code)});
    return group;
  }
  JointLevels joint = join_levels(design.columns, factors, design.rows);
  group.owned = std::move(joint.codes);
  group.codes = group.owned;
  group.tuples = std::move(joint.tuples);
  return group;
}

std::size_t find_dense(Layout& layout, const Product& product, bool centred) {
  if (product.empty()) return 0;
  for (std::size_t d = 1; d < layout.dense.size(); ++d)
    if (layout.dense[d].product == product && layout.dense[d].centred == centred) return d;
  layout.dense.push_back({product, centred, std::nullopt});
  return layout.dense.size() - 1;
}

std::size_t home_of(const Layout& layout, const TermColumns& term) {
  for (std::size_t g = 0; g < layout.groups.size(); ++g)
    if (contains(layout.groups[g].factors, term.factors)) return g;
  return 0;
}

void add_block(Layout& layout, const TermColumns& term, std::size_t product) {
  Block block;
  block.group = home_of(layout, term);
  Group& group = layout.groups[block.group];
  const bool alone = term.products[product].empty();
  if (!alone)
    for (std::size_t b = 0; b < layout.blocks.size(); ++b) {
      // The same levels by themselves: the block of a term with the same factors and no multiplier.
      const Block& other = layout.blocks[b];
      const TermColumns* owner = nullptr;
      for (const TermColumns& t : layout.design->terms)
        if (t.size() > 0 && other.coefficients[0] >= t.first && other.coefficients[0] < t.first + t.size())
          owner = &t;
      if (other.multiplier == 0 && owner && owner->factors == term.factors) block.base = b;
    }
  block.multiplier = alone ? 0 : find_dense(layout, term.products[product], block.base.has_value());
  std::map<std::vector<std::int32_t>, std::int32_t> level_of;
  for (std::size_t c = 0; c < term.combinations.size(); ++c) {
    level_of[term.combinations[c]] = static_cast<std::int32_t>(c);
    block.coefficients.push_back(term.coefficient(c, product));
    layout.places[block.coefficients.back()] = {std::nullopt, layout.blocks.size(), c};
  }
  std::vector<std::size_t> where;
  for (const std::size_t f : term.factors)
    where.push_back(std::find(group.factors.begin(), group.factors.end(), f) - group.factors.begin());
  for (const auto& tuple : group.tuples) {
    std::vector<std::int32_t> own;
    for (const std::size_t w : where) own.push_back(tuple[w]);
    const auto at = level_of.find(own);
    block.level_of.push_back(at == level_of.end() ? -1 : at->second);
  }
  if (std::find(group.multipliers.begin(), group.multipliers.end(), block.multiplier) ==
      group.multipliers.end())
    group.multipliers.push_back(block.multiplier);
  layout.blocks.push_back(std::move(block));
}

GroupPair pair_groups(const Layout& layout, std::size_t first, std::size_t second) {
  constexpr std::size_t most_table_cells = 1 << 18;
  const Group &a = layout.groups[first], &b = layout.groups[second];
  GroupPair pair{first, second, {}, {}, a.size() * b.size()};
  if (pair.size <= most_table_cells) return pair;
  std::unordered_map<std::uint64_t, std::int32_t> code_of;
  pair.codes.resize(layout.rows);
  for (std::size_t i = 0; i < layout.rows; ++i) {
    const auto [at, fresh] = code_of.try_emplace(
        static_cast<std::uint64_t>(a.codes[i]) * b.size() + static_cast<std::uint64_t>(b.codes[i]),
        static_cast<std::int32_t>(pair.tuples.size()));
    if (fresh) pair.tuples.emplace_back(a.codes[i], b.codes[i]);
    pair.codes[i] = at->second;
  }
  pair.size = pair.tuples.size();
  return pair;
}

}  // namespace

std::size_t Group::slot(std::size_t multiplier) const {
  return std::find(multipliers.begin(), multipliers.end(), multiplier) - multipliers.begin();
}

Layout lay_out(const Design& design) {
  Layout layout;
  layout.design = &design;
  layout.rows = design.rows;
  layout.coefficients = design.coefficients;
  layout.places.resize(design.coefficients);
  layout.dense.push_back({{}, false, 0});
  layout.places[0].dense = 0;
  for (const auto& factors : group_factors(design)) layout.groups.push_back(make_group(design, factors));
  for (std::size_t a = 0; a < layout.groups.size(); ++a)
    for (std::size_t b = a + 1; b < layout.groups.size(); ++b)
      layout.pairs.push_back(pair_groups(layout, a, b));
  for (const TermColumns& term : design.terms) {
    if (!term.factors.empty()) continue;
    for (std::size_t k = 0; k < term.products.size(); ++k) {
      // A term given twice gets a column of its own, to be found aliased.
      std::size_t d = find_dense(layout, term.products[k], true);
      if (layout.dense[d].coefficient) {
        layout.dense.push_back({term.products[k], true, std::nullopt});
        d = layout.dense.size() - 1;
      }
      layout.dense[d].coefficient = term.coefficient(0, k);
      layout.places[term.coefficient(0, k)].dense = d;
    }
  }
  // Levels alone before levels times numbers, which look for them.
  for (const bool alone : {true, false})
    for (const TermColumns& term : design.terms) {
      if (term.factors.empty() || term.size() == 0) continue;
      for (std::size_t k = 0; k < term.products.size(); ++k)
        if (term.products[k].empty() == alone) add_block(layout, term, k);
    }
  return layout;
}

double raw_value(const Design& design, const Product& product, std::size_t row) {
  double value = 1;
  for (const Feature& feature : product) value *= feature.at(design.columns[feature.column].numbers[row]);
  return value;
}

}  // namespace countsel
