// protocol/questions/terms.hpp -- the terms of a model, from the wire to the engine's design.
//
// Checked by: tests/protocol/transcripts/what_drives.txt.
#pragma once

#include <string>
#include <utility>
#include <vector>

#include "engine/models/design.hpp"
#include "protocol/declare/question.hpp"

namespace countsel {

/// A term as asked: a kind, a column by name, its numbers, or the parts of a product.
struct AskedTerm {
  enum class Kind { by_column, levels, log, power, cross };
  Kind kind = Kind::by_column;
  std::string column;
  double plus = 0, to = 1;
  std::vector<AskedTerm> parts;
};

/// The terms of a request; `given` false means every column without a role.
struct AskedTerms {
  bool given = false;
  std::vector<AskedTerm> list;
  std::vector<std::pair<std::string, std::string>> references;  ///< column, level
};

/// Reads `with.terms`; refuses bad_type and bad_value.
void read_terms(AskedTerms& terms, const Json& given);
/// Reads `with.reference`: {"material":"pvc"}.
void read_references(AskedTerms& terms, const Json& given);

/// Fills in the terms from the columns where none were given, and says which columns are needed as what. A
/// column that looks like an identifier is left out and named.
std::vector<std::pair<std::string, Holds>> columns_for_terms(AskedTerms& terms,
                                                             const std::vector<const Column*>& columns,
                                                             std::vector<Note>& notes);

/// Source columns and terms for the engine, from the columns taken in (in the order of columns_for_terms).
struct ModelTerms {
  std::vector<SourceColumn> columns;
  std::vector<Term> terms;
};
ModelTerms engine_terms(const AskedTerms& terms, const std::vector<Role>& extra);

}  // namespace countsel
