// protocol/declare/spec.hpp -- the parts of a question's declaration.
//
// Each part is bound to a member of the question's struct: decoding fills the member, the default is
// the member's initialiser, and nothing is looked up by name when a question is answered.
#pragma once

#include <functional>
#include <limits>
#include <nlohmann/json.hpp>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "protocol/declare/asked.hpp"
#include "protocol/wire/json_fwd.hpp"

namespace countsel {

/// What the cells of a role must be.
enum class Holds {
  count,     ///< whole, 0 or more, up to 2^53
  exposure,  ///< above 0; 0 with a count of 0 leaves the row out
  above_0,   ///< a number above 0
  not_below_0,
  number,
  levels,
  label,         ///< text; a blank keeps its row
  order,         ///< numbers, or levels in order of first appearance
  exposure_or_0  ///< as exposure, but a row with 0 and a count of 0 stays: what is not observed there matters
};

struct RoleSpec {
  std::string name;
  Holds holds;
  bool required;
  std::string doc;
  std::function<Role&(Asked&)> at;
};

struct OptionSpec {
  std::string name, type, doc, unit = {};
  Json allowed = nullptr;  ///< list of the values allowed, or null
  std::optional<double> above = {}, below = {}, at_least = {}, at_most = {};
  std::function<void(Asked&, const Json&)> set = {};
  std::function<Json(const Asked&)> get = {};
  bool hidden_default = false;

  OptionSpec over(double bound) && {
    above = bound;
    return std::move(*this);
  }
  OptionSpec under(double bound) && {
    below = bound;
    return std::move(*this);
  }
  OptionSpec from(double bound) && {
    at_least = bound;
    return std::move(*this);
  }
  OptionSpec to(double bound) && {
    at_most = bound;
    return std::move(*this);
  }
};

/// How a figure or a column is rounded and headed for people.
enum class Style {
  text,
  count,
  exposure,
  rate,
  every,
  ratio,
  log,
  p_value,
  statistic,
  share,
  number,
  whole,
  level
};

struct FigureSpec {
  std::string name;
  Style style;
  std::string doc;
  std::string low = {}, high = {};  ///< the figures that are its limits
};

struct ColumnSpec {
  std::string name;
  Style style;
  std::string heading;              ///< may hold {events}, {per}, {exposure}; empty: from the style
  std::string low = {}, high = {};  ///< the columns that are its limits
};

struct TableSpec {
  std::string name, doc;
  std::vector<ColumnSpec> columns;
};

/// Options bound to members. A refusal names the option, what came and what is allowed.
namespace bind {

[[noreturn]] void wrong_type(const std::string& option, const std::string& wanted, const Json& got);
double number_of(const OptionSpec& spec, const Json& got);
std::string level_of(const std::string& option, const Json& got);
[[noreturn]] void not_allowed(const OptionSpec& spec, const Json& got);

template <class A>
OptionSpec number(std::string name, double A::*member, std::string doc, std::string unit = {}) {
  OptionSpec spec{.name = std::move(name), .type = "number", .doc = std::move(doc), .unit = std::move(unit)};
  spec.set = [member](Asked& asked, const Json& got) { static_cast<A&>(asked).*member = got.get<double>(); };
  spec.get = [member](const Asked& asked) { return Json(static_cast<const A&>(asked).*member); };
  return spec;
}
template <class A>
OptionSpec number(std::string name, std::optional<double> A::*member, std::string doc,
                  std::string unit = {}) {
  OptionSpec spec{.name = std::move(name), .type = "number", .doc = std::move(doc), .unit = std::move(unit)};
  spec.set = [member](Asked& asked, const Json& got) { static_cast<A&>(asked).*member = got.get<double>(); };
  spec.get = [member](const Asked& asked) {
    const auto& value = static_cast<const A&>(asked).*member;
    return value ? Json(*value) : Json();
  };
  return spec;
}
template <class A>
OptionSpec flag(std::string name, bool A::*member, std::string doc) {
  OptionSpec spec{.name = std::move(name), .type = "boolean", .doc = std::move(doc)};
  spec.set = [member](Asked& asked, const Json& got) { static_cast<A&>(asked).*member = got.get<bool>(); };
  spec.get = [member](const Asked& asked) { return Json(static_cast<const A&>(asked).*member); };
  return spec;
}
template <class A>
OptionSpec text(std::string name, std::string A::*member, std::string doc) {
  OptionSpec spec{.name = std::move(name), .type = "text", .doc = std::move(doc)};
  spec.set = [member](Asked& asked, const Json& got) {
    static_cast<A&>(asked).*member = got.get<std::string>();
  };
  spec.get = [member](const Asked& asked) {
    const auto& value = static_cast<const A&>(asked).*member;
    return value.empty() ? Json() : Json(value);
  };
  return spec;
}
/// The text of one level of a column; a number or a boolean is taken as its text.
template <class A>
OptionSpec level(std::string name, std::optional<std::string> A::*member, std::string doc) {
  OptionSpec spec{.name = name, .type = "level", .doc = std::move(doc)};
  spec.set = [member, name](Asked& asked, const Json& got) {
    static_cast<A&>(asked).*member = level_of(name, got);
  };
  spec.get = [member](const Asked& asked) {
    const auto& value = static_cast<const A&>(asked).*member;
    return value ? Json(*value) : Json();
  };
  return spec;
}
/// One of a list of names, each standing for a value of an enumeration; the member's initialiser is the
/// default.
template <class A, class E>
OptionSpec choice(std::string name, E A::*member, std::string doc,
                  std::vector<std::pair<std::string, E>> names) {
  OptionSpec spec{.name = std::move(name), .type = "choice", .doc = std::move(doc)};
  spec.allowed = Json::array();
  for (const auto& [word, value] : names) spec.allowed.push_back(word);
  spec.get = [member, names](const Asked& asked) {
    for (const auto& [word, value] : names) {
      if (value == static_cast<const A&>(asked).*member) return Json(word);
    }
    return Json();
  };
  spec.set = [member, names = std::move(names)](Asked& asked, const Json& got) {
    for (const auto& [word, value] : names) {
      if (word == got.get_ref<const std::string&>()) static_cast<A&>(asked).*member = value;
    }
  };
  return spec;
}
/// An option of its own shape: `set` reads it and refuses what it cannot use.
template <class A>
OptionSpec custom(std::string name, std::string type, std::string doc, void (*set)(A&, const Json&),
                  Json standard = nullptr) {
  OptionSpec spec{.name = std::move(name), .type = std::move(type), .doc = std::move(doc)};
  spec.set = [set](Asked& asked, const Json& got) { set(static_cast<A&>(asked), got); };
  spec.get = [standard](const Asked&) { return standard; };
  return spec;
}

template <class A>
RoleSpec role(std::string name, Holds holds, Role A::*member, std::string doc, bool required = false) {
  return {std::move(name), holds, required, std::move(doc),
          [member](Asked& asked) -> Role& { return static_cast<A&>(asked).*member; }};
}

}  // namespace bind
}  // namespace countsel
