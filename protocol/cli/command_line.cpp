// protocol/cli/command_line.cpp -- arguments by CLI11, requests by the wire's own reader.
#include "protocol/cli/command_line.hpp"

#include <unistd.h>

#include <CLI/CLI.hpp>
#include <iostream>
#include <sstream>

#include "protocol/catalogue.hpp"
#include "protocol/cli/arguments.hpp"
#include "protocol/cli/deliver.hpp"
#include "protocol/cli/help.hpp"
#include "protocol/cli/print.hpp"
#include "protocol/session/session.hpp"
#include "protocol/wire/reply.hpp"
#include "protocol/wire/request_reader.hpp"

namespace countsel {
namespace {

constexpr int answered = 0, refused = 1, misuse = 2;

/// Asks on this thread and prints; the reply is read back from the wire's text, so that people and programs
/// are told the same.
int ask_and_print(Session& session, Request request, bool as_json, std::ostream& out) {
  const std::string id = request.id, ask = request.ask;
  if (!as_json)
    request.want = Json(std::vector<std::string>{"say", "figures", "tables", "heads", "shown", "notes"});
  const Reply reply = session.answer_now(request);
  if (as_json) {
    out << reply_line(id, ask, reply.part, reply.body) << "\n";
  } else if (reply.refused()) {
    print_refusal(std::cerr, Json::parse(reply.body));
  } else {
    print_answer(out, Json::parse(reply.body));
  }
  return reply.refused() ? refused : answered;
}

}  // namespace

int run_command_line(int argc, char** argv) {
  CLI::App app(
      "Countsel: rates of events, how sure they are, and what to make of them.\n"
      "Without a command it serves: one JSON request per line in, one reply per line out.",
      "countsel");
  app.set_version_flag("--version", "countsel " COUNTSEL_VERSION);
  app.footer(main_footer());
  ServerOptions options;
  app.add_option("--files", options.files, "folder below which requests may name CSV files")
      ->type_name("FOLDER");
  app.add_option("--max-line", options.longest_line, "bytes that a line may have (default 268435456)")
      ->check(CLI::PositiveNumber)
      ->type_name("BYTES");
  app.add_option("--workers", options.workers,
                 "requests worked on at once (default: as many as the machine has)")
      ->check(CLI::Range(1, 1024))
      ->type_name("N");
  app.add_flag("--log", options.log, "a line to standard error for each request");

  AskArguments asked;
  auto* ask = app.add_subcommand("ask", "Ask one question about a table.");
  ask->add_option("question", asked.question, "the question's name")->required()->type_name("QUESTION");
  ask->add_option("arguments", asked.arguments, "option=value …, then a CSV file or - for standard input")
      ->type_name("[option=value …] [TABLE.csv | -]");
  ask->add_option("--roles", asked.roles, "which column plays which role: count=bursts,exposure=km_years")
      ->type_name("ROLE=COLUMN,…");
  ask->add_option("--words", asked.words, "words for sentences: events=bursts,exposure=km-years")
      ->type_name("WORD=TEXT,…");
  ask->add_option("--only", asked.only, "keep these rows; may be given several times")
      ->allow_extra_args(false)
      ->type_name("COLUMN=VALUE");
  ask->add_flag("--no-header", asked.no_header, "the table's first row is data");
  ask->add_flag("--json", asked.json, "print the wire's reply");
  ask->footer(ask_footer());

  std::string line;
  bool quick_json = false;
  auto* quick = app.add_subcommand("quick", "Answer a line as spoken in a meeting.");
  quick->add_option("line", line, "such as \"14 in 2300 vs 5 in 2100\"")->required()->type_name("LINE");
  quick->add_flag("--json", quick_json, "print the wire's reply");

  std::string name;
  bool questions_json = false;
  auto* questions = app.add_subcommand("questions", "List the questions, or explain one.");
  questions->add_option("name", name, "the question to explain")->type_name("NAME");
  questions->add_flag("--json", questions_json, "print the wire's reply");
  app.require_subcommand(0, 1);

  std::ostringstream out;
  try {
    app.parse(argc, argv);
  } catch (const CLI::ParseError& error) {
    const int status = app.exit(error, out, std::cerr) == 0 ? answered : misuse;
    return deliver(out.str(), status);
  }

  Session session(options, STDOUT_FILENO);
  try {
    if (ask->parsed()) {
      const int status = ask_and_print(session, request_of(asked), asked.json, out);
      return deliver(out.str(), status);
    }
    if (quick->parsed()) {
      const Json request = {{"ask", "quick"}, {"of", {{"line", line}}}};
      const int status = ask_and_print(session, read_request(request.dump()), quick_json, out);
      return deliver(out.str(), status);
    }
    if (questions->parsed() && questions_json) {
      Json request = {{"ask", "questions"}};
      if (!name.empty()) request["with"] = {{"name", name}};
      const int status = ask_and_print(session, read_request(request.dump()), true, out);
      return deliver(out.str(), status);
    }
    if (questions->parsed()) {
      const int status = print_questions(out, std::cerr, name) ? answered : refused;
      return deliver(out.str(), status);
    }
  } catch (const Misuse& trouble) {
    std::cerr << "countsel: " << trouble.what() << "\n";
    return misuse;
  } catch (const Refusal& refusal) {
    print_refusal(std::cerr,
                  {{"code", code_name(refusal.code)}, {"text", refusal.text}, {"hint", refusal.hint}});
    return refused;
  } catch (const nlohmann::json::exception&) {
    std::cerr << "countsel: the arguments are not valid UTF-8.\n";
    return misuse;
  }
  session.serve(STDIN_FILENO);
  return answered;
}

}  // namespace countsel
