// engine/models/design.cpp -- from terms to named coefficients.
#include "engine/models/design.hpp"

#include <algorithm>
#include <cmath>

#include "engine/models/levels.hpp"
#include "engine/refusal.hpp"

namespace countsel {

Term slope_of(std::size_t column) { return {Term::Kind::slope, column, 0, 1, {}}; }
Term log_of(std::size_t column, double plus) { return {Term::Kind::log, column, plus, 1, {}}; }
Term power_of(std::size_t column, double to) { return {Term::Kind::power, column, 0, to, {}}; }
Term levels_of(std::size_t column) { return {Term::Kind::levels, column, 0, 1, {}}; }
Term cross_of(std::vector<Term> parts) { return {Term::Kind::cross, 0, 0, 1, std::move(parts)}; }

double Feature::at(double x) const {
  switch (kind) {
    case Kind::log:
      return std::log(x + plus);
    case Kind::power:
      // Whole powers by multiplication: exact where the product is.
      if (to == 2) return x * x;
      if (to == 3) return x * x * x;
      return std::pow(x, to);
    default:
      return x;
  }
}

std::string Design::coefficient_name(std::size_t coefficient) const {
  for (const CoefficientRow& row : table)
    if (row.coefficient == coefficient) return row.level ? row.name + "[" + *row.level + "]" : row.name;
  return "?";
}

namespace {

std::string plain(double x) {
  std::string text = std::to_string(x);
  text.erase(text.find_last_not_of('0') + 1);
  if (text.back() == '.') text.pop_back();
  return text;
}

/// What a term's parts multiply to, before the combinations are looked up in the rows.
TermColumns shape_of(std::span<const SourceColumn> columns, const Term& term) {
  if (term.kind == Term::Kind::cross) {
    if (term.parts.empty()) throw Refusal(Code::bad_value, "A cross needs at least one part.");
    TermColumns all;
    all.products = {Product{}};
    for (const Term& part : term.parts) {
      const TermColumns one = shape_of(columns, part);
      all.name += (all.name.empty() ? "" : " x ") + one.name;
      for (const std::size_t f : one.factors)
        if (std::find(all.factors.begin(), all.factors.end(), f) == all.factors.end())
          all.factors.push_back(f);
      std::vector<Product> products;
      for (const Product& a : all.products)
        for (const Product& b : one.products) {
          products.push_back(a);
          products.back().insert(products.back().end(), b.begin(), b.end());
        }
      all.products = std::move(products);
    }
    return all;
  }
  if (term.column >= columns.size()) throw Refusal(Code::internal, "A term names no column.");
  const SourceColumn& column = columns[term.column];
  TermColumns one;
  one.name = column.name;
  if (term.kind == Term::Kind::levels) {
    if (!column.levels)
      throw Refusal(Code::bad_type, column.name + " holds numbers where levels are needed.",
                    {{column.name, 0}});
    one.factors = {term.column};
    one.products = {Product{}};
    return one;
  }
  if (column.levels)
    throw Refusal(Code::bad_type, column.name + " holds levels where numbers are needed.",
                  {{column.name, 0}});
  Feature feature{Feature::Kind::identity, term.column, term.plus, term.to};
  if (term.kind == Term::Kind::log) {
    feature.kind = Feature::Kind::log;
    one.name = term.plus == 0 ? "log " + column.name : "log (" + column.name + " + " + plain(term.plus) + ")";
  } else if (term.kind == Term::Kind::power) {
    feature.kind = Feature::Kind::power;
    one.name = column.name + "^" + plain(term.to);
  }
  one.products = {Product{feature}};
  return one;
}

void check_finite(std::span<const SourceColumn> columns, const TermColumns& term) {
  for (const Product& product : term.products)
    for (const Feature& feature : product) {
      if (feature.kind == Feature::Kind::identity) continue;
      const SourceColumn& column = columns[feature.column];
      for (std::size_t i = 0; i < column.numbers.size(); ++i)
        if (!std::isfinite(feature.at(column.numbers[i])))
          throw Refusal(
              Code::bad_value,
              "Row " + std::to_string(i + 1) + " of " + column.name + " is " + plain(column.numbers[i]) +
                  (feature.kind == Feature::Kind::log ? ", which has no logarithm."
                                                      : ", which has no such power."),
              {{column.name, static_cast<std::int64_t>(i + 1)}},
              feature.kind == Feature::Kind::log ? "Give \"plus\" to shift the numbers above 0." : "");
    }
}

std::int32_t choose_reference(const SourceColumn& column, const ObservedLevels& seen) {
  if (column.reference) {
    for (const std::int32_t code : seen.order)
      if ((*column.levels)[code] == *column.reference) return code;
    throw Refusal(Code::bad_value, "\"" + *column.reference + "\" is no level of " + column.name + ".",
                  {{column.name, 0}});
  }
  std::int32_t best = seen.order.front();
  for (const std::int32_t code : seen.order)
    if (seen.exposure[code] > seen.exposure[best]) best = code;
  return best;
}

/// Finds the combinations of non-reference levels that have a row.
void find_combinations(const Design& design, const std::vector<ObservedLevels>& seen, TermColumns& term) {
  if (term.factors.size() == 1) {
    for (const std::int32_t code : seen[term.factors[0]].order)
      if (code != design.references[term.factors[0]]) term.combinations.push_back({code});
  } else {
    for (const auto& tuple : join_levels(design.columns, term.factors, design.rows).tuples) {
      bool any_reference = false;
      for (std::size_t f = 0; f < tuple.size(); ++f)
        any_reference |= tuple[f] == design.references[term.factors[f]];
      if (!any_reference) term.combinations.push_back(tuple);
    }
  }
  for (const auto& tuple : term.combinations) {
    std::string name;
    for (std::size_t f = 0; f < tuple.size(); ++f)
      name += (f ? " x " : "") + (*design.columns[term.factors[f]].levels)[tuple[f]];
    term.level_names.push_back(std::move(name));
  }
}

/// Numbers the coefficients and writes the lines of the table of ratios.
void number_coefficients(Design& design) {
  design.coefficients = 1;
  design.table = {{std::nullopt, "baseline", std::nullopt, 0}};
  for (std::size_t t = 0; t < design.terms.size(); ++t) {
    TermColumns& term = design.terms[t];
    term.first = design.coefficients;
    design.coefficients += term.size();
    const std::size_t count = term.factors.empty() ? 1 : term.combinations.size();
    // A single level column shows its reference before the first of the levels that appeared after it.
    const bool plain_levels =
        term.factors.size() == 1 && term.products.size() == 1 && term.products[0].empty();
    bool reference_due = plain_levels;
    const auto show_reference = [&] {
      const SourceColumn& column = design.columns[term.factors[0]];
      design.table.push_back(
          {t, term.name, (*column.levels)[design.references[term.factors[0]]], std::nullopt});
      reference_due = false;
    };
    for (std::size_t c = 0; c < count; ++c) {
      if (reference_due && c == term.reference_place) show_reference();
      for (std::size_t k = 0; k < term.products.size(); ++k)
        design.table.push_back({t, term.name,
                                term.factors.empty() ? std::nullopt : std::optional(term.level_names[c]),
                                term.coefficient(c, k)});
    }
    if (reference_due) show_reference();
  }
}

}  // namespace

Design make_design(std::span<const SourceColumn> columns, std::span<const Term> terms, std::size_t rows,
                   std::span<const double> exposure, const Work& work) {
  Design design;
  design.columns = columns;
  design.rows = rows;
  for (const SourceColumn& column : columns) {
    const std::size_t n = column.levels ? column.codes.size() : column.numbers.size();
    if (n != design.rows)
      throw Refusal(Code::length_mismatch, column.name + " has " + std::to_string(n) + " rows, not " +
                                               std::to_string(design.rows) + ".");
  }
  if (!exposure.empty() && exposure.size() != design.rows)
    throw Refusal(Code::length_mismatch, "The exposure has " + std::to_string(exposure.size()) +
                                             " rows, not " + std::to_string(design.rows) + ".");
  if (design.rows == 0) throw Refusal(Code::too_few, "There are no rows to fit a model to.");

  std::vector<std::size_t> used;
  for (const Term& term : terms) {
    design.terms.push_back(shape_of(columns, term));
    check_finite(columns, design.terms.back());
    for (const std::size_t f : design.terms.back().factors)
      if (std::find(used.begin(), used.end(), f) == used.end()) used.push_back(f);
  }
  std::vector<ObservedLevels> seen(columns.size());
  work.workers.run(used.size(),
                   [&](std::size_t u) { seen[used[u]] = observe_levels(columns[used[u]], exposure); });
  design.references.assign(columns.size(), -1);
  for (const std::size_t f : used) design.references[f] = choose_reference(columns[f], seen[f]);
  for (TermColumns& term : design.terms) {
    if (term.factors.empty()) continue;
    find_combinations(design, seen, term);
    const auto& order = seen[term.factors[0]].order;
    term.reference_place =
        std::find(order.begin(), order.end(), design.references[term.factors[0]]) - order.begin();
  }
  number_coefficients(design);
  return design;
}

Design without_term(const Design& design, std::size_t term) {
  Design smaller = design;
  smaller.terms.erase(smaller.terms.begin() + static_cast<std::ptrdiff_t>(term));
  number_coefficients(smaller);
  return smaller;
}

}  // namespace countsel
