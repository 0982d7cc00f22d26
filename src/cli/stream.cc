// See stream.h.
#include "cli/stream.h"

#include <fmt/format.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <chrono>
#include <csignal>
#include <cstdlib>
#include <cstring>
#include <iostream>
#include <sstream>
#include <stdexcept>
#include <utility>

namespace tiersmith::cli {
namespace {

constexpr std::size_t kMostJobs = 256;

struct Block {
  int first = 1;  // the number of its first form
  std::vector<std::string> forms;
};

struct Answers {  // to a block
  std::string out, messages;
  std::size_t forms = 0;
  bool none = false;     // some form has no result
  bool stopped = false;  // at a form that cannot be read
};

// What is said while this lives.
class Messages {
 public:
  Messages() : before_(std::cerr.rdbuf(said_.rdbuf())) {}
  ~Messages() { std::cerr.rdbuf(before_); }
  Messages(const Messages&) = delete;
  Messages& operator=(const Messages&) = delete;
  std::string All() const { return said_.str(); }

 private:
  std::ostringstream said_;
  std::streambuf* before_;
};

Answers AnswerBlock(const FormOptions& options, const FormVerb& verb, const FormSource& source, const Block& block) {
  Answers answers;
  const Messages messages;
  int number = block.first;
  for (const std::string& form : block.forms) {
    const std::size_t before = answers.out.size();
    answers.out += number == 1 ? verb.frame.first : verb.frame.between;
    TextError error;
    Answered answered = verb.answer(form, &answers.out, &error);
    if (answered == Answered::kUnread) {
      PrintTextError(source, form, number, error, options.json());
      answers.stopped = !options.keep_going;
      if (answers.stopped) {
        answers.out.resize(before);
        break;
      }
      verb.unread(form, &answers.out);
    }
    answers.none = answers.none || answered != Answered::kResult;
    ++answers.forms;
    ++number;
  }
  answers.messages = messages.All();
  return answers;
}

// ---- workers ------------------------------------------------------------------------------------------
bool Put(std::FILE* to, std::size_t number) { return std::fwrite(&number, sizeof number, 1, to) == 1; }
bool Put(std::FILE* to, const std::string& text) {
  return Put(to, text.size()) && std::fwrite(text.data(), 1, text.size(), to) == text.size();
}
bool Get(std::FILE* from, std::size_t* number) { return std::fread(number, sizeof *number, 1, from) == 1; }
bool Get(std::FILE* from, std::string* text) {
  std::size_t size = 0;
  if (!Get(from, &size)) return false;
  text->resize(size);
  return std::fread(text->data(), 1, size, from) == size;
}

bool PutBlock(std::FILE* to, const Block& block) {
  bool good = Put(to, static_cast<std::size_t>(block.first)) && Put(to, block.forms.size());
  for (const std::string& form : block.forms) good = good && Put(to, form);
  return good && std::fflush(to) == 0;
}
bool GetBlock(std::FILE* from, Block* block) {
  std::size_t first = 0, size = 0;
  if (!Get(from, &first) || !Get(from, &size)) return false;
  block->first = static_cast<int>(first);
  block->forms.resize(size);
  for (std::string& form : block->forms) {
    if (!Get(from, &form)) return false;
  }
  return true;
}

bool PutAnswers(std::FILE* to, const Answers& answers) {
  return Put(to, answers.out) && Put(to, answers.messages) && Put(to, answers.forms) &&
         Put(to, std::size_t{answers.none}) && Put(to, std::size_t{answers.stopped}) && std::fflush(to) == 0;
}
bool GetAnswers(std::FILE* from, Answers* answers) {
  std::size_t none = 0, stopped = 0;
  const bool good = Get(from, &answers->out) && Get(from, &answers->messages) && Get(from, &answers->forms) &&
                    Get(from, &none) && Get(from, &stopped);
  answers->none = none != 0;
  answers->stopped = stopped != 0;
  return good;
}

// Answers blocks, each given one after the one before was taken, on its own or in workers.
class Answerers {
 public:
  Answerers(const FormOptions& options, const FormVerb& verb, const FormSource& source)
      : options_(options), verb_(verb), source_(source) {
    const bool alone = options.jobs == 1 || !source.from_stdin();
    for (std::size_t i = 0; !alone && i < options.jobs; ++i) Fork();
  }
  ~Answerers() {
    for (Worker& worker : workers_) {
      kill(worker.process, SIGTERM);
      std::fclose(worker.to);
      std::fclose(worker.from);
    }
    for (Worker& worker : workers_) waitpid(worker.process, nullptr, 0);
  }
  Answerers(const Answerers&) = delete;
  Answerers& operator=(const Answerers&) = delete;

  bool empty() const { return given_ == taken_; }
  bool full() const { return given_ - taken_ == std::max<std::size_t>(1, workers_.size()); }

  // Requires: not full.
  void Give(const Block& block) {
    if (workers_.empty()) {
      alone_ = AnswerBlock(options_, verb_, source_, block);
    } else {
      // A worker that is gone is an error to report, not a signal.
      const auto before = std::signal(SIGPIPE, SIG_IGN);
      const bool put = PutBlock(workers_[given_ % workers_.size()].to, block);
      std::signal(SIGPIPE, before);
      if (!put) throw std::runtime_error("a worker of --jobs is gone");
    }
    ++given_;
  }

  // Those to the block that was given first. Requires: not empty.
  Answers Take() {
    const std::size_t turn = taken_++;
    if (workers_.empty()) return std::move(alone_);
    Answers answers;
    if (!GetAnswers(workers_[turn % workers_.size()].from, &answers))
      throw std::runtime_error("a worker of --jobs is gone");
    return answers;
  }

 private:
  struct Worker {
    pid_t process;
    std::FILE *to, *from;
  };

  void Fork() {
    int there[2], back[2];
    if (pipe(there) != 0 || pipe(back) != 0) Failed();
    const pid_t process = fork();
    if (process < 0) Failed();
    if (process == 0) {
      for (const Worker& other : workers_) {  // or they would never see their end
        close(fileno(other.to));
        close(fileno(other.from));
      }
      close(there[1]);
      close(back[0]);
      Work(fdopen(there[0], "rb"), fdopen(back[1], "wb"));
    }
    close(there[0]);
    close(back[1]);
    workers_.push_back({process, fdopen(there[1], "wb"), fdopen(back[0], "rb")});
  }

  [[noreturn]] void Work(std::FILE* from, std::FILE* to) const {
    int code = kFine;
    try {
      Block block;
      while (GetBlock(from, &block) && PutAnswers(to, AnswerBlock(options_, verb_, source_, block))) {
      }
    } catch (const std::exception& error) {
      PrintError(error.what());
      code = kFiles;
    }
    _exit(code);  // what is still to be written is the parent's
  }

  [[noreturn]] static void Failed() {
    throw std::runtime_error(fmt::format("no worker for --jobs could be started: {}", std::strerror(errno)));
  }

  const FormOptions& options_;
  const FormVerb& verb_;
  const FormSource& source_;
  std::vector<Worker> workers_;
  Answers alone_;
  std::size_t given_ = 0, taken_ = 0;
};

// ---- progress -----------------------------------------------------------------------------------------
// "120000 forms, 95000 a second", on a terminal to which nothing else is written, once it takes long.
class Progress {
 public:
  explicit Progress(const Output& output) {
    const char* terminal = std::getenv("TERM");
    shown_there_ = isatty(STDERR_FILENO) != 0 && terminal != nullptr && std::strcmp(terminal, "dumb") != 0 &&
                   !output.to_terminal();
  }
  ~Progress() { Erase(); }

  void Add(std::size_t forms) {
    forms_ += forms;
    const Clock::time_point now = Clock::now();
    if (!shown_there_ || now < next_) return;
    next_ = now + std::chrono::milliseconds(200);
    const double seconds = std::chrono::duration<double>(now - start_).count();
    std::cerr << fmt::format("\r{} forms, {:.0f} a second\033[K", forms_, static_cast<double>(forms_) / seconds)
              << std::flush;
    drawn_ = true;
  }
  void Erase() {
    if (drawn_) std::cerr << "\r\033[K" << std::flush;
    drawn_ = false;
  }

 private:
  using Clock = std::chrono::steady_clock;
  const Clock::time_point start_ = Clock::now();
  Clock::time_point next_ = start_ + std::chrono::seconds(2);
  std::size_t forms_ = 0;
  bool shown_there_ = false;
  bool drawn_ = false;
};

// The next forms, up to one that would have to be waited for; false at the end.
bool NextBlock(FormSource& source, std::size_t most, Block* block) {
  block->forms.clear();
  std::string form;
  int number = 0;
  while (block->forms.size() < most && (block->forms.empty() || !source.WouldWait()) && source.Next(&form, &number)) {
    if (block->forms.empty()) block->first = number;
    block->forms.push_back(std::move(form));
  }
  return !block->forms.empty();
}

}  // namespace

void AddFormOptions(CLI::App& verb, FormOptions& options, const std::string& kind) {
  verb.add_option("FORMS", options.forms, kind + " forms; none, or -: one a line on standard input");
  verb.add_flag("--keep-going", options.keep_going, "after a bad form print ∅ and go on (exit code 1 at the end)");
  verb.add_option("--jobs", options.jobs,
                  "worker processes for the lines of standard input (1); the output is the same")
      ->type_name("N");
}

bool GoodFormOptions(const FormOptions& options) {
  if (BothFromStdin(options, options.forms)) return false;
  if (options.jobs >= 1 && options.jobs <= kMostJobs) return true;
  PrintError(fmt::format("--jobs {}: give a number from 1 to {}", options.jobs, kMostJobs));
  return false;
}

int AnswerForms(const FormOptions& options, const FormVerb& verb, Output& output) {
  FormSource source(options.forms);
  Answerers answerers(options, verb, source);
  Progress progress(output);
  bool any = false, none = false, stopped = false;
  output.Write(verb.frame.open);
  const auto put_out = [&] {
    const Answers answers = answerers.Take();
    output.Write(answers.out);
    if (!answers.messages.empty()) {
      progress.Erase();
      std::cerr << answers.messages;
    }
    progress.Add(answers.forms);
    any = any || answers.forms > 0;
    none = none || answers.none;
    stopped = answers.stopped;
  };
  Block block;
  while (!stopped) {
    if (source.WouldWait()) {
      while (!stopped && !answerers.empty()) put_out();
      output.Flush();
    }
    if (stopped || !NextBlock(source, verb.block, &block)) break;
    if (answerers.full()) put_out();
    if (!stopped) answerers.Give(block);
  }
  while (!stopped && !answerers.empty()) put_out();
  progress.Erase();
  const std::string& close = any ? verb.frame.close : verb.frame.none;
  if (stopped) {
    if (source.from_stdin()) PrintHelp("--keep-going goes on after bad lines and prints ∅ for them");
    if (options.output.empty()) output.Write(close);
    return kUsage;
  }
  if (source.failed()) {
    PrintError("reading standard input failed");
    return kFiles;
  }
  output.Write(close);
  const int code = output.Finish();
  return code != kFine ? code : none ? kDisagree : kFine;
}

}  // namespace tiersmith::cli
