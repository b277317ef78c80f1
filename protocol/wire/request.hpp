// protocol/wire/request.hpp -- a line as it was read: nothing checked against a question yet.
#pragma once

#include <memory>
#include <nlohmann/json.hpp>
#include <optional>
#include <string>
#include <vector>

#include "engine/refusal.hpp"
#include "engine/table/column.hpp"
#include "protocol/wire/json_fwd.hpp"

namespace countsel {

/// A table of columns of one length (when it has been checked), shared because held tables are.
struct Table {
  std::vector<std::shared_ptr<const Column>> columns;
  bool header = true;            ///< the origin's first row is a header
  bool row_wise = false;         ///< sent as rows: a range, a file
  std::int64_t uneven_row = 0;   ///< first data row of another length than the first, 0 if none
  std::size_t uneven_cells = 0;  ///< how many cells it has
  std::string origin;            ///< address of the top left cell, empty if not given

  std::size_t rows() const { return columns.empty() ? 0 : columns.front()->size(); }
  const Column* find(std::string_view name) const;
};

/// `of` as it was written. Exactly one of the forms should be there; that is checked later.
struct Of {
  bool given = false;
  std::vector<Column> direct;  ///< keys that are no form: roles directly
  std::optional<std::vector<Column>> columns;
  std::optional<std::vector<Column>> range;  ///< without the first row
  Column first_row;                          ///< of the range, cell by cell
  std::int64_t uneven_row = 0;
  std::size_t uneven_cells = 0;
  std::string id;  ///< as JSON text, for `cancel`; empty if absent
  Json rest;  ///< object of the small keys as written: held, file, roles, only, origin, header, line, id, …
};

struct Request {
  std::string id;        ///< as it was written, a JSON text; empty if absent
  std::string id_plain;  ///< the same without needless escapes, to compare ids by
  std::string ask;
  Of of;
  Json with, words, want;  ///< null if absent
  Json read_as;            ///< of `quick`: what the line was read as; else null
  std::optional<double> within_s;
  bool progress = false;
  std::optional<std::string> unknown_key;  ///< the first
  std::optional<Refusal> trouble;          ///< the line's syntax
  std::optional<Refusal> ask_trouble;      ///< `ask` is no text
  std::optional<Refusal> type_trouble;     ///< a key of the wrong type, decided after the unknown keys
};

}  // namespace countsel
