// protocol/data/source.hpp -- which table a request is about: sent with it, held, or a file.
//
// Checked by: tests/protocol/data_forms_test.py, tests/protocol/files_test.py.
#pragma once

#include <filesystem>
#include <functional>
#include <memory>
#include <string>

#include "protocol/declare/asked.hpp"
#include "protocol/wire/request.hpp"

namespace countsel {

/// Where tables that are not in the request come from.
struct Shelf {
  std::function<std::shared_ptr<const Table>(const std::string& name)> held;  ///< null if there is none
  std::function<std::vector<std::string>()> held_names;
  std::filesystem::path files;  ///< only below this folder; empty: no files at all
  std::size_t largest_file = std::size_t{256} << 20;
};

/// The table that `of` names or holds (its data is moved out of the request).
/// Refuses not_found, not_allowed, bad_type, bad_value (two columns of one name, two forms at once),
/// missing (no data at all).
/// A file is read by the marks that `with` names.
std::shared_ptr<const Table> take_table(Of& of, const Json& with, const Shelf& shelf);
/// The marks that options name, before they are checked.
CellRules marks_in(const Json& with);

}  // namespace countsel
