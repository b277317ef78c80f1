// protocol/data/source.cpp -- the forms of data, and the fence round files.
#include "protocol/data/source.hpp"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>

#include "protocol/data/columns.hpp"
#include "protocol/data/csv.hpp"
#include "protocol/declare/nearest.hpp"
#include "protocol/wire/brief.hpp"

namespace countsel {
namespace {

namespace fs = std::filesystem;

std::string read_file(const fs::path& below, const std::string& name, std::size_t largest) {
  if (below.empty()) {
    throw Refusal(Code::not_allowed, "This server reads no files.", {},
                  "Start it with --files FOLDER, or send the data.");
  }
  if (name.find('\0') != std::string::npos)
    throw Refusal(Code::not_allowed, "A file's name cannot hold a NUL.");
  std::error_code trouble;
  const fs::path root = fs::canonical(below, trouble);
  if (trouble) throw Refusal(Code::not_found, "The folder given with --files is not there.");
  const fs::path asked = root / name;
  // The way is judged first as it is written, so that nothing outside can even be probed for.
  const fs::path lexical = asked.lexically_normal();
  const auto inside = [&root](const fs::path& path) {
    return std::mismatch(root.begin(), root.end(), path.begin(), path.end()).first == root.end();
  };
  const std::string outside = "\"" + brief(name) + "\" lies outside the folder that this server may read.";
  const fs::path plain = fs::path(name).lexically_normal();
  const bool climbs = !plain.empty() && *plain.begin() == "..";
  if (plain.is_absolute() || climbs || !inside(lexical)) throw Refusal(Code::not_allowed, outside);
  const fs::path real = fs::weakly_canonical(asked, trouble);
  if (!trouble && !inside(real)) throw Refusal(Code::not_allowed, outside);
  const int descriptor = ::open(real.c_str(), O_RDONLY | O_CLOEXEC | O_NOFOLLOW | O_NONBLOCK);
  if (descriptor < 0) throw Refusal(Code::not_found, "There is no file \"" + brief(name) + "\" to read.");
  struct Closer {
    int descriptor;
    ~Closer() { ::close(descriptor); }
  } closer{descriptor};
  struct stat facts {};
  if (::fstat(descriptor, &facts) != 0 || !S_ISREG(facts.st_mode)) {
    throw Refusal(Code::not_allowed, "\"" + brief(name) + "\" is not a plain file.");
  }
  // A folder on the way may have been exchanged since it was judged; what was opened is judged again.
  const fs::path opened = fs::read_symlink("/proc/self/fd/" + std::to_string(descriptor), trouble);
  if (!trouble && !inside(opened)) throw Refusal(Code::not_allowed, outside);
  if (static_cast<std::size_t>(facts.st_size) > largest) {
    throw Refusal(Code::too_large, "\"" + brief(name) + "\" is larger than this server reads.", {},
                  "Start it with a larger --max-line.");
  }
  std::string text(static_cast<std::size_t>(facts.st_size), '\0');
  std::size_t filled = 0;
  while (filled < text.size()) {
    const auto got = ::read(descriptor, text.data() + filled, text.size() - filled);
    if (got <= 0) break;
    filled += static_cast<std::size_t>(got);
  }
  text.resize(filled);
  return text;
}

std::string text_of(const Json& rest, const char* key) {
  const auto at = rest.find(key);
  if (at == rest.end() || at->is_null()) return {};
  if (!at->is_string()) {
    throw Refusal(Code::bad_type,
                  std::string("of.") + key + " is " + brief_json(*at) + "; it should be a text.");
  }
  return at->get<std::string>();
}

Table from_range(Of& of, bool header) {
  Table table;
  table.row_wise = true;
  table.header = header;
  auto& columns = *of.range;
  const std::size_t width = of.first_row.size();
  if (!header) {
    // What was kept apart as a header is the first data row after all.
    for (std::size_t i = 0; i < width; ++i) {
      ColumnBuilder whole;
      const auto put = [&whole](const Column& from, std::size_t cell) {
        const auto tag = from.tag_at(cell);
        if (tag == tag::number) {
          whole.number(from.numbers[cell]);
        } else if (tag >= 0) {
          whole.text(from.texts[static_cast<std::size_t>(tag)]);
        } else {
          whole.other(tag);
        }
      };
      put(of.first_row, i);
      if (i < columns.size()) {
        for (std::size_t cell = 0; cell < columns[i].size(); ++cell) put(columns[i], cell);
      }
      table.columns.push_back(std::make_shared<const Column>(whole.take(numbered_name(i))));
    }
    for (std::size_t i = width; i < columns.size(); ++i) {
      columns[i].name = numbered_name(i);
      table.columns.push_back(std::make_shared<const Column>(std::move(columns[i])));
    }
  } else {
    for (std::size_t i = 0; i < columns.size(); ++i) {
      columns[i].name = i < width ? level_text(of.first_row, i) : numbered_name(i);
      if (columns[i].name.empty()) columns[i].name = numbered_name(i);
      table.columns.push_back(std::make_shared<const Column>(std::move(columns[i])));
    }
  }
  table.uneven_row = of.uneven_row == 0 ? 0 : of.uneven_row + (header ? 0 : 1);
  table.uneven_cells = of.uneven_cells;
  return table;
}

}  // namespace

CellRules marks_in(const Json& with) {
  CellRules rules;
  if (!with.is_object()) return rules;
  const auto text = [&with](const char* key) {
    const auto at = with.find(key);
    return at != with.end() && at->is_string() ? at->get<std::string>() : std::string();
  };
  rules.thousands = text("thousands");
  if (const std::string decimal = text("decimal"); !decimal.empty()) {
    rules.decimal = decimal;
    rules.decimal_given = true;
  }
  return rules;
}

std::shared_ptr<const Table> take_table(Of& of, const Json& with, const Shelf& shelf) {
  const auto& rest = of.rest;
  bool header = true;
  if (rest.contains("header") && !rest["header"].is_null()) {
    if (!rest["header"].is_boolean()) throw Refusal(Code::bad_type, "of.header is true or false.");
    header = rest["header"].get<bool>();
  }
  const std::string held = text_of(rest, "held"), file = text_of(rest, "file");
  const bool named_held = rest.contains("held") && !rest["held"].is_null();
  const bool named_file = rest.contains("file") && !rest["file"].is_null();
  const int forms = (named_held ? 1 : 0) + (named_file ? 1 : 0) + (of.columns ? 1 : 0) + (of.range ? 1 : 0) +
                    (of.direct.empty() ? 0 : 1);
  if (forms > 1) {
    throw Refusal(Code::bad_value, "of holds the data in more than one form.", {},
                  "Give one of: roles directly, columns, range, held, file.");
  }
  if (forms == 0) return nullptr;
  if (named_held) {
    auto table = shelf.held ? shelf.held(held) : nullptr;
    if (table) return table;
    const std::string near = shelf.held_names ? nearest(held, shelf.held_names()) : "";
    throw Refusal(Code::not_found, "No table is held under \"" + brief(held) + "\".", {},
                  near.empty() ? "Send it with hold first." : "Did you mean \"" + near + "\"?");
  }
  Table table;
  if (named_file) {
    table = read_delimited(read_file(shelf.files, file, shelf.largest_file), ',', header, marks_in(with));
  } else if (of.range) {
    table = from_range(of, header);
  } else {
    auto& columns = of.columns ? *of.columns : of.direct;
    for (auto& column : columns) table.columns.push_back(std::make_shared<const Column>(std::move(column)));
    table.header = header;
  }
  check_names(table);
  return std::make_shared<const Table>(std::move(table));
}

}  // namespace countsel
