// protocol/session/session.cpp -- reading, queueing, cancelling, finishing.
#include "protocol/session/session.hpp"

#include <algorithm>
#include <cstdio>

#include "protocol/catalogue.hpp"
#include "protocol/services/quick.hpp"
#include "protocol/wire/json_writer.hpp"
#include "protocol/wire/reply.hpp"
#include "protocol/wire/request_reader.hpp"

namespace countsel {
namespace {

using Clock = std::chrono::steady_clock;

constexpr std::size_t small_rows = 2000;
constexpr auto between_progress = std::chrono::milliseconds(100);

}  // namespace

struct Session::Job {
  Request request;
  std::string id, id_plain, ask;
  const Question* question = nullptr;
  std::shared_ptr<const Table> table;
  bool reads_file = false;
  std::uint64_t place = 0;
  Clock::time_point read_at = Clock::now();
  std::optional<Clock::time_point> deadline;
  std::atomic<bool> cancelled{false};
  bool started = false;  // guarded by the session's mutex
  std::mutex telling;
  Clock::time_point told_at;
};

Session::Session(const ServerOptions& options, int output)
    : options_(options),
      output_(output),
      pool_(options.workers ? options.workers : std::max(1U, std::thread::hardware_concurrency())) {}

Shelf Session::file_shelf() const {
  Shelf shelf;
  shelf.files = options_.files;
  shelf.largest_file = options_.longest_line;
  return shelf;
}

Shelf Session::shelf() const {
  Shelf shelf = file_shelf();
  shelf.held = [this](const std::string& name) {
    const auto at = held_.find(name);
    return at == held_.end() ? nullptr : at->second;
  };
  shelf.held_names = [this] {
    std::vector<std::string> names;
    for (const auto& [name, table] : held_) names.push_back(name);
    return names;
  };
  return shelf;
}

Work Session::work_for(const std::shared_ptr<Job>& job) {
  Work work;
  work.workers = pool_.workers();
  work.progress.asked = [job = job.get()] {
    if (job->cancelled.load(std::memory_order_relaxed)) {
      throw Refusal(Code::cancelled, "The request was cancelled.");
    }
    if (job->deadline && Clock::now() > *job->deadline) {
      throw Refusal(Code::out_of_time, "The time allowed for the request is over.", {},
                    "Allow more with within_s, or ask about fewer rows or terms.");
    }
  };
  if (job->request.progress) {
    job->told_at = Clock::now();
    work.progress.told = [this, job = job.get()](double share, std::string_view doing) {
      const std::lock_guard lock(job->telling);
      const auto now = Clock::now();
      if (now - job->told_at < between_progress) return;
      job->told_at = now;
      std::string body;
      JsonWriter(body).open('{').key("share").number(share).key("doing").text(doing).close('}');
      output_.aside(reply_line(job->id, "", "progress", body));
    };
  }
  return work;
}

void Session::finish(Job& job, Reply reply) {
  {
    // An id is free again as soon as its reply is on its way, or the answer could be overtaken by a refusal.
    // From here on a cancel comes too late; what came before decides.
    const std::lock_guard lock(mutex_);
    const auto [first, last] = pending_.equal_range(job.id_plain);
    for (auto at = first; at != last; ++at) {
      if (at->second.get() == &job) {
        pending_.erase(at);
        break;
      }
    }
    if (job.cancelled) reply = refuse(Refusal(Code::cancelled, "The request was cancelled."));
  }
  if (options_.log) {
    const auto took = std::chrono::duration<double, std::milli>(Clock::now() - job.read_at).count();
    std::fprintf(stderr, "countsel: %s %s: %s in %.3f ms\n", job.id.empty() ? "-" : job.id.c_str(),
                 job.ask.empty() ? "?" : job.ask.c_str(), reply.refused() ? "refused" : "answered", took);
  }
  output_.reply(job.place, reply_line(job.id, job.ask, reply.part, reply.body));
  if (unfinished_.fetch_sub(1) == 1) {
    const std::lock_guard lock(mutex_);
    settled_.notify_all();
  }
}

Reply Session::reply_to(const std::shared_ptr<Job>& job) {
  try {
    if (job->reads_file) job->table = take_table(job->request.of, job->request.with, file_shelf());
  } catch (...) {
    return refuse(current_trouble());
  }
  Context context;
  context.work = work_for(job);
  context.session = this;
  return answer_request(job->request, *job->question, std::move(job->table), std::move(context));
}

void Session::run(const std::shared_ptr<Job>& job) {
  {
    const std::lock_guard lock(mutex_);
    if (job->cancelled) return;  // while it waited; its reply has been given
    job->started = true;
  }
  finish(*job, reply_to(job));
}

bool Session::cancel(const std::string& id) {
  std::shared_ptr<Job> job;
  bool waiting = false;
  {
    const std::lock_guard lock(mutex_);
    const auto at = pending_.find(id);
    if (id.empty() || at == pending_.end()) return false;
    job = at->second;
    waiting = !job->started && !job->cancelled;
    job->cancelled = true;
  }
  if (waiting) finish(*job, {});
  return true;
}

void Session::handle(Request request) {
  auto job = std::make_shared<Job>();
  job->place = output_.reserve();
  job->id = request.id;
  job->id_plain = request.id_plain;
  job->ask = request.ask;
  if (request.within_s) {
    const double seconds = std::min(*request.within_s, 1e8);
    job->deadline =
        job->read_at + std::chrono::duration_cast<Clock::duration>(std::chrono::duration<double>(seconds));
  }
  const bool idle = unfinished_.fetch_add(1) == 0;
  bool pending_twice = false;
  {
    const std::lock_guard lock(mutex_);
    pending_twice = !job->id_plain.empty() && pending_.count(job->id_plain) > 0;
    if (!pending_twice) pending_.emplace(job->id_plain, job);
  }
  try {
    job->question = &question_of(request);
    if (pending_twice) {
      throw Refusal(Code::bad_value, "A request with the id " + job->id + " is still pending.", {},
                    "Give each pending request an id of its own.");
    }
    if (job->question->name == "quick") job->question = &read_quick(request);
    if (!job->question->roles.empty() || job->question->takes_columns) {
      // A held table is looked up now: later lines may release it. A file can be read by a worker.
      const auto& file = request.of.rest.find("file");
      job->reads_file = !job->question->service && file != request.of.rest.end() && !file->is_null();
      if (!job->reads_file) job->table = take_table(request.of, request.with, shelf());
    }
  } catch (...) {
    return finish(*job, refuse(current_trouble()));
  }
  job->request = std::move(request);
  const bool small =
      job->question->light && !job->reads_file && (!job->table || job->table->rows() <= small_rows);
  if (job->question->service || (idle && small) || !pool_.post([this, job] { run(job); })) run(job);
}

void Session::serve(int input) {
  LineSource source(input, options_.longest_line);
  while (!ending_ && source.next_line()) handle(read_request(source));
  std::unique_lock lock(mutex_);
  settled_.wait(lock, [this] { return unfinished_.load() == 0; });
}

Reply Session::answer_now(Request& request) {
  try {
    const Question* question = &question_of(request);
    std::shared_ptr<const Table> table;
    if (question->name == "quick") question = &read_quick(request);
    if (!question->roles.empty() || question->takes_columns)
      table = take_table(request.of, request.with, shelf());
    Context context;
    context.work.workers = pool_.workers();
    context.session = this;
    return answer_request(request, *question, std::move(table), std::move(context));
  } catch (...) {
    return refuse(current_trouble());
  }
}

}  // namespace countsel
