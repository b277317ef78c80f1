// protocol/services/service.hpp -- questions about the server itself: declared like the others.
#pragma once

#include "protocol/declare/question.hpp"
#include "protocol/session/session.hpp"

namespace countsel {

/// Makes a declaration a service: no cautions, no method, no options about cells; `of_keys` are the keys of
/// `of` that it reads.
template <class A>
Question service(Declaration<A> declared, std::vector<std::string> of_keys = {}, bool takes_columns = false) {
  const auto own_options = declared.options.size();
  const bool reads_cells = !declared.roles.empty();
  Question made = question(std::move(declared));
  made.service = true;
  made.of_keys = std::move(of_keys);
  made.takes_columns = made.takes_columns || takes_columns;
  if (!reads_cells) made.options.resize(own_options);
  return made;
}

}  // namespace countsel
