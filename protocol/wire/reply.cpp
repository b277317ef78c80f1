// protocol/wire/reply.cpp -- the order and the shape of what goes out.
#include "protocol/wire/reply.hpp"

#include <algorithm>
#include <cmath>

#include "protocol/declare/decode.hpp"
#include "protocol/wire/json_writer.hpp"
#include "protocol/wording/shown.hpp"

namespace countsel {
namespace {

constexpr std::size_t most_places = 20;
constexpr std::size_t most_points = 2000;

void write_figure(JsonWriter& out, const Figure& figure) {
  if (const auto* number = std::get_if<double>(&figure)) {
    out.number(*number);
  } else if (const auto* text = std::get_if<std::string>(&figure)) {
    out.text(*text);
  } else {
    out.boolean(std::get<bool>(figure));
  }
}

void write_cells(JsonWriter& out, const Cells& cells) {
  if (const auto* numbers = std::get_if<std::vector<double>>(&cells)) {
    out.numbers(*numbers);
  } else if (const auto* texts = std::get_if<std::vector<std::string>>(&cells)) {
    out.texts(*texts);
  } else if (const auto* mixed = std::get_if<std::vector<Figure>>(&cells)) {
    out.open('[');
    for (const auto& figure : *mixed) write_figure(out, figure);
    out.close(']');
  } else {
    out.open('[');
    for (const auto& text : std::get<std::vector<OptionalText>>(cells)) {
      text ? out.text(*text) : out.raw("null");
    }
    out.close(']');
  }
}

void write_where(JsonWriter& out, const std::vector<Place>& places, const Places& where) {
  out.key("where").open('[');
  for (std::size_t i = 0; i < places.size() && i < most_places; ++i) {
    out.open('{');
    if (!places[i].column.empty()) out.key("column").text(places[i].column);
    if (places[i].row > 0) out.key("row").number(static_cast<double>(places[i].row));
    if (const auto cell = where.cell(places[i])) out.key("cell").text(*cell);
    out.close('}');
  }
  out.close(']');
}

/// Indices of the points drawn: all, or at most 2,000 evenly spread, always with both ends.
std::vector<std::size_t> drawn_points(std::size_t points) {
  const std::size_t drawn = std::min(points, most_points);
  std::vector<std::size_t> indices(drawn);
  for (std::size_t i = 0; i < drawn; ++i) indices[i] = drawn < 2 ? i : i * (points - 1) / (drawn - 1);
  return indices;
}

template <class T>
std::vector<T> chosen(const std::vector<T>& all, const std::vector<std::size_t>& indices) {
  if (indices.size() == all.size()) return all;
  std::vector<T> some;
  some.reserve(indices.size());
  for (const auto i : indices) {
    if (i < all.size()) some.push_back(all[i]);
  }
  return some;
}

void write_picture(JsonWriter& out, const Picture& picture) {
  const std::size_t points = std::visit([](const auto& x) { return x.size(); }, picture.x);
  const auto indices = drawn_points(points);
  out.key("picture").open('{').key("kind").text(picture.kind).key("title").text(picture.title);
  out.key("x").open('{').key("name").text(picture.x_name);
  if (const auto* labels = std::get_if<std::vector<std::string>>(&picture.x)) {
    out.key("labels").texts(chosen(*labels, indices));
  } else {
    out.key("values").numbers(chosen(std::get<std::vector<double>>(picture.x), indices));
  }
  out.close('}').key("y").open('{').key("name").text(picture.y_name).close('}');
  out.key("series").open('[');
  for (const auto& series : picture.series) {
    out.open('{').key("name").text(series.name).key("role").text(series.role);
    out.key("y").numbers(chosen(series.y, indices));
    if (!series.low.empty()) out.key("low").numbers(chosen(series.low, indices));
    if (!series.high.empty()) out.key("high").numbers(chosen(series.high, indices));
    out.close('}');
  }
  out.close(']').key("lines").open('[');
  for (const auto& [name, y] : picture.lines)
    out.open('{').key("name").text(name).key("y").number(y).close('}');
  out.close(']').close('}');
}

const TableSpec* spec_of(const Question& question, const std::string& table) {
  for (const auto& spec : question.tables) {
    if (spec.name == table) return &spec;
  }
  return nullptr;
}

void write_tables(JsonWriter& out, const Answer& answer) {
  out.key("tables").open('{');
  for (const auto& table : answer.tables) {
    out.key(table.name).open('{');
    for (const auto& [name, cells] : table.columns) {
      out.key(name);
      write_cells(out, cells);
    }
    out.close('}');
  }
  out.close('}');
}

void write_heads(JsonWriter& out, const Question& question, const Answer& answer, const Wording& wording) {
  out.key("heads").open('{');
  for (const auto& table : answer.tables) {
    const TableSpec* spec = spec_of(question, table.name);
    out.key(table.name).open('{');
    for (const auto& [name, cells] : table.columns) out.key(name).text(column_heading(spec, name, wording));
    out.close('}');
  }
  out.close('}');
}

void write_shown(JsonWriter& out, const Question& question, const Answer& answer) {
  out.key("shown").open('{');
  for (const auto& table : answer.tables) {
    const TableSpec* spec = spec_of(question, table.name);
    out.key(table.name).open('{');
    for (const auto& [name, texts] : shown_columns(spec, table)) out.key(name).texts(texts);
    out.close('}');
  }
  out.close('}');
}

void write_notes(JsonWriter& out, const Answer& answer, const Places& places) {
  out.key("notes").open('[');
  for (const auto& note : answer.notes) {
    out.open('{').key("code").text(note.code).key("text").text(note.text);
    if (!note.where.empty()) write_where(out, note.where, places);
    out.close('}');
  }
  const std::size_t points =
      answer.picture ? std::visit([](const auto& x) { return x.size(); }, answer.picture->x) : 0;
  if (points > most_points) {
    out.open('{').key("code").text("picture_thinned");
    out.key("text").text("The picture shows 2,000 of " + std::to_string(points) + " points, evenly spread.");
    out.close('}');
  }
  out.close(']');
}

std::string hex_text(std::uint64_t digest) {
  static constexpr char hex[] = "0123456789abcdef";
  std::string text(16, '0');
  for (std::size_t i = 0; i < 16; ++i) text[15 - i] = hex[digest >> (4 * i) & 15];
  return text;
}

}  // namespace

std::string answer_text(const Question& question, const Answer& answer, const Wording& wording,
                        const Places& places, const std::vector<std::string>& wanted, std::uint64_t digest) {
  std::string text;
  JsonWriter out(text);
  const auto want = [&wanted](const char* part) {
    return std::find(wanted.begin(), wanted.end(), part) != wanted.end();
  };
  out.open('{');
  if (want("say")) out.key("say").text(answer.say);
  if (want("figures") && !(question.service && answer.figures.empty())) {
    out.key("figures").open('{');
    for (const auto& [name, figure] : answer.figures) {
      out.key(name);
      write_figure(out, figure);
    }
    out.close('}');
  }
  const bool tables = !(question.service && answer.tables.empty());
  if (want("tables") && tables) write_tables(out, answer);
  if (want("heads") && tables) write_heads(out, question, answer, wording);
  if (want("shown") && tables) write_shown(out, question, answer);
  const std::string& headline = answer.headline.empty() ? question.headline : answer.headline;
  const bool has_headline = std::any_of(answer.figures.begin(), answer.figures.end(),
                                        [&](const auto& figure) { return figure.first == headline; });
  if (want("headline") && has_headline) out.key("headline").text(headline);
  if (want("picture") && answer.picture) write_picture(out, *answer.picture);
  if (want("method") && !question.service) {
    out.key("method").open('[');
    for (const auto& method : answer.method) {
      out.open('{').key("name").text(method.name).key("source").text(method.publication).close('}');
    }
    out.close(']');
  }
  if (want("notes") && !(question.service && answer.notes.empty())) write_notes(out, answer, places);
  if (answer.more.is_object()) {
    for (const auto& [name, value] : answer.more.items()) out.key(name).raw(value.dump());
  }
  if (want("stamp") && !question.service) {
    out.key("stamp")
        .open('{')
        .key("countsel")
        .text(COUNTSEL_VERSION)
        .key("data")
        .text(hex_text(digest))
        .close('}');
  }
  out.close('}');
  return text;
}

std::string refusal_text(const Refusal& refusal, const Places& places) {
  std::string text;
  JsonWriter out(text);
  out.open('{').key("code").text(code_name(refusal.code)).key("text").text(refusal.text);
  write_where(out, refusal.places, places);
  if (!refusal.hint.empty()) out.key("hint").text(refusal.hint);
  out.close('}');
  return text;
}

std::string reply_line(const std::string& id, const std::string& ask, const char* part,
                       const std::string& body) {
  std::string line;
  JsonWriter out(line);
  out.open('{');
  if (!id.empty()) out.key("id").raw(id);
  if (!ask.empty()) out.key("ask").text(ask);
  out.key(part).raw(body);
  out.close('}');
  return line;
}

}  // namespace countsel
