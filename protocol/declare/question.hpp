// protocol/declare/question.hpp -- one declaration per question; everything else follows from it.
//
// Decoding, refusals and their hints, `questions`, the command line's help, the README's table, the
// notebook's functions and the example tests are all read off a Question.
#pragma once

#include <memory>
#include <string>
#include <vector>

#include "protocol/declare/spec.hpp"

namespace countsel {

struct Question {
  std::string name;
  std::string asks;  ///< the question in plain words, ending in "?"; a service's one line ends in "."
  std::vector<RoleSpec> roles;
  std::vector<OptionSpec> options;
  std::vector<FigureSpec> figures;
  std::vector<TableSpec> tables;
  std::vector<Source> sources;
  std::string headline;
  std::vector<std::string> examples;
  bool service = false;        ///< about the server, not about rates
  bool light = false;          ///< within about a millisecond at two thousand rows
  bool as_sent = false;        ///< reads the table itself: no cell is judged, no row left out
  bool takes_columns = false;  ///< columns without a role are used too
  std::vector<std::vector<std::string>> either;  ///< sets of roles of which one must be given whole
  std::vector<std::string> of_keys;              ///< small keys of `of` that a service reads
  std::function<std::unique_ptr<Asked>()> make;
  std::function<Answer(Asked&, Context&)> answer;
  /// Columns beside the roles that are used, with what they must hold; asked once the options are read.
  std::function<std::vector<std::pair<std::string, Holds>>(Asked&, const std::vector<const Column*>&,
                                                           std::vector<Note>&)>
      extra_columns;
};

template <class A>
struct Declaration {
  std::string name, asks;
  std::vector<RoleSpec> roles = {};
  std::vector<OptionSpec> options = {};
  std::vector<FigureSpec> figures = {};
  std::vector<TableSpec> tables = {};
  std::vector<Source> sources = {};
  std::string headline = {};
  Answer (*answer)(const A&, Context&);
  std::vector<std::pair<std::string, Holds>> (*extra_columns)(A&, const std::vector<const Column*>&,
                                                              std::vector<Note>&) = nullptr;
  std::vector<std::string> examples = {};
  bool light = false;
  std::vector<std::vector<std::string>> either = {};
};

/// The options about cells that every question with data has.
std::vector<OptionSpec> cell_options();
/// Of every question that shows counts: withhold the small ones.
OptionSpec mask_option();
bool has_count_columns(const std::vector<TableSpec>& tables);

template <class A>
Question question(Declaration<A> declared) {
  Question made;
  made.name = std::move(declared.name);
  made.asks = std::move(declared.asks);
  made.roles = std::move(declared.roles);
  made.options = std::move(declared.options);
  for (auto& option : cell_options()) made.options.push_back(std::move(option));
  if (has_count_columns(declared.tables)) made.options.push_back(mask_option());
  made.figures = std::move(declared.figures);
  made.tables = std::move(declared.tables);
  made.sources = std::move(declared.sources);
  made.headline = std::move(declared.headline);
  made.examples = std::move(declared.examples);
  made.light = declared.light;
  made.either = std::move(declared.either);
  made.make = [] { return std::make_unique<A>(); };
  made.answer = [answer = declared.answer](Asked& asked, Context& context) {
    return answer(static_cast<A&>(asked), context);
  };
  if (declared.extra_columns) {
    made.takes_columns = true;
    made.extra_columns = [extra = declared.extra_columns](Asked& asked,
                                                          const std::vector<const Column*>& columns,
                                                          std::vector<Note>& notes) {
      return extra(static_cast<A&>(asked), columns, notes);
    };
  }
  return made;
}

}  // namespace countsel
