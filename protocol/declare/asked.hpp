// protocol/declare/asked.hpp -- what a question is asked with: roles filled, options read.
#pragma once

#include <cstdint>
#include <functional>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "engine/rates/limits.hpp"
#include "engine/table/column.hpp"
#include "engine/work.hpp"
#include "protocol/declare/answer.hpp"

namespace countsel {

/// One role's column, after the rows that cannot be used have been left out. All given roles of one
/// request have the same number of rows.
struct Role {
  bool given = false;
  std::string column;                   ///< the column's name, for words about it
  std::span<const double> numbers;      ///< for roles that hold numbers
  std::span<const std::int32_t> codes;  ///< for roles that hold levels: indices into `levels`
  std::vector<std::string> levels;      ///< distinct levels, in order of first appearance
  std::shared_ptr<const Column> source;

  std::vector<double> own_numbers;
  std::vector<std::int32_t> own_codes;
};

/// Words for sentences and headings; empty where none were given.
struct Words {
  std::string event, events, exposure, period;
};

/// How cells are read; shared by every question that takes data.
enum class ErrorCells { refuse, skip };
enum class Totals { refuse, skip, keep };
struct CellRules {
  std::string decimal = ".", thousands;
  bool decimal_given = false;  ///< said, not assumed: then "1.200" and "1,200" are no riddle
  ErrorCells error_cells = ErrorCells::refuse;
  Totals totals = Totals::refuse;
};

/// What headings and sentences must know of an answer's frame.
struct Frame {
  double per = 1, confidence = 0.95;
  bool exposure_given = true;
};

/// The root of every question's struct of roles and options.
struct Asked {
  virtual ~Asked() = default;
  virtual Frame frame() const { return {}; }

  CellRules cells;
  std::optional<double> mask_below;  ///< counts under this are withheld

  // Filled by the intake, not by the asker.
  std::size_t rows = 0;             ///< rows used
  std::size_t rows_sent = 0;        ///< rows of the table before any was left out
  std::vector<std::uint32_t> kept;  ///< indices of the rows used; empty if all are
  Words words;
  std::vector<Role> extra;  ///< columns beside the roles, where a question takes them

  /// The table's row (from 1) of the i-th used row.
  std::int64_t row_number(std::size_t i) const {
    return static_cast<std::int64_t>((kept.empty() ? i : kept[i]) + 1);
  }
};

/// Options that most questions about rates share (contract, section 4).
struct RateAsked : Asked {
  Role count, exposure;
  double confidence = 0.95;
  double per = 1;

  Frame frame() const override { return {per, confidence, exposure.given}; }
};

class Session;
struct Request;
struct Table;
struct Casting;
class Places;

/// What a question may use besides what it was asked with.
struct Context {
  Work work;
  std::vector<Note> notes;
  Session* session = nullptr;          ///< for service questions
  const Request* request = nullptr;    ///< likewise
  std::shared_ptr<const Table> table;  ///< likewise
  const Casting* casting = nullptr;    ///< likewise
  const Places* places = nullptr;      ///< likewise
};

}  // namespace countsel
