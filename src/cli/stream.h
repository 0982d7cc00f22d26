// Forms through a verb, an answer each, in their order: those of the arguments, or a line each on standard input, in bounded
// memory however long that is.
//
// With --jobs N blocks of lines go to N workers in turn, and what they answer is put out in turn: the same bytes as one gives. The
// workers are processes, not threads: a grammar remembers what it has spelled, readers and machines keep what they work in, and
// after a fork each worker has all of that to itself, shared until it is written to.
// Tested by tests/cli/streams.sh.
#pragma once

#include <functional>
#include <string>
#include <vector>

#include "cli/command.h"

namespace tiersmith::cli {

struct FormOptions : CommonOptions {
  std::vector<std::string> forms;
  bool keep_going = false;
  std::size_t jobs = 1;
};

// FORMS, --keep-going, --jobs. `kind`: "underlying" or "surface".
void AddFormOptions(CLI::App& verb, FormOptions& options, const std::string& kind);
// False, after saying why.
bool GoodFormOptions(const FormOptions& options);

// What stands around answers: `close` behind the last, `none` where there was not one.
struct Frame {
  std::string open, first, between, close, none;

  static Frame Json() { return {"[", "\n", ",\n", "\n]\n", "]\n"}; }
};

enum class Answered { kResult, kNoResult, kUnread };

struct FormVerb {
  Frame frame;
  std::size_t block = 256;  // lines that are answered at a time
  // Appends the answer, or says why the form cannot be read. Messages go to std::cerr.
  std::function<Answered(const std::string& form, std::string* out, TextError* error)> answer;
  // Appends what is put out for a form that cannot be read.
  std::function<void(const std::string& form, std::string* out)> unread;
};

// Answers all forms. The exit code: kDisagree if some form has no result; kUsage if one cannot be read, unless --keep-going.
int AnswerForms(const FormOptions& options, const FormVerb& verb, Output& output);

}  // namespace tiersmith::cli
