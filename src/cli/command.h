// What the verbs share: common options, loading and compiling a grammar, output files, exit codes.
// Tested by tests/cli/.
#pragma once

#include <CLI/CLI.hpp>
#include <cstdio>
#include <memory>
#include <string>
#include <vector>

#include "base/diagnostics.h"
#include "base/source_map.h"
#include "model/text.h"
#include "run/machine_file.h"

namespace tiersmith::cli {

// Exit codes.
inline constexpr int kFine = 0;
inline constexpr int kDisagree = 1;  // the data disagree, or a form has no candidate or no result
inline constexpr int kUsage = 2;     // usage, or an error in the grammar or in a form
inline constexpr int kFiles = 3;     // reading or writing failed

struct CommonOptions {
  std::string grammar;
  std::vector<std::string> without;
  std::string format = "text";
  std::string output;
  bool spelled = false;
  std::vector<std::string> formats = {"text", "tsv", "json"};  // those the verb writes

  bool json() const { return format == "json"; }
};

// The positional GRAMMAR, --without, --format, -o.
void AddCommonOptions(CLI::App& verb, CommonOptions& options);

// Prints to standard error, as text (coloured where it is a terminal) or as JSON.
void PrintDiagnostics(const Diagnostics& diagnostics, const SourceMap& sources, bool json);
void PrintError(const std::string& message);
void PrintHelp(const std::string& message);
void PrintNote(const std::string& message);

// A grammar ready for a verb. `code` is kFine, or the exit code after the diagnostics were printed.
struct Loaded : CompiledGrammar {
  int code = kFine;
  std::shared_ptr<SourceMap> sources;
};
// Reads and checks the grammar, or opens a machine file, and leaves out the rules named by --without.
Loaded LoadOnly(const CommonOptions& options);
// The same, with its machines: those of the machine file, or compiled.
Loaded LoadAndCompile(const CommonOptions& options);
// kFiles if a file could not be read, else kUsage.
int CodeFor(const Diagnostics& diagnostics);

// Standard output, or a file that is written beside its place and renamed into it by Finish(). Without Finish()
// the file at that place stays as it was.
class Output {
 public:
  explicit Output(const std::string& path);
  ~Output();
  Output(const Output&) = delete;
  Output& operator=(const Output&) = delete;

  bool good() const { return file_ != nullptr; }
  bool to_terminal() const;
  void Write(std::string_view text);
  void Flush();
  // kFine, or kFiles after saying what failed.
  int Finish();

 private:
  bool Drain();

  std::string path_;  // empty: standard output
  std::string temporary_;
  std::FILE* file_ = nullptr;
  std::string buffer_;
  bool failed_ = false;
};

// Forms given as arguments, or one a line on standard input (no argument, or "-").
class FormSource {
 public:
  explicit FormSource(std::vector<std::string> arguments);
  // The next form; false at the end. `number` counts arguments or lines from 1.
  bool Next(std::string* form, int* number);
  bool from_stdin() const { return stdin_; }
  // No form is waiting: what was written should be flushed before the next one is asked for.
  bool WouldWait() const;
  bool failed() const;

 private:
  std::vector<std::string> arguments_;
  bool stdin_ = false;
  int next_ = 0;
};

// True, after saying so, if both the grammar and the forms are to come from standard input.
bool BothFromStdin(const CommonOptions& options, const std::vector<std::string>& forms);

// Prints what is wrong with a form, with its line and a caret.
void PrintTextError(const FormSource& source, const std::string& form, int number, const TextError& error, bool json);

// The value with tabs and line ends written \t \n, so that it stays one field of one line.
std::string Field(std::string_view text);
// A JSON string, quotes included.
std::string JsonString(std::string_view text);
// Columns padded to their widest cell by display width; `right` marks columns set flush right.
std::string Table(const std::vector<std::vector<std::string>>& rows, const std::vector<bool>& right);

// Each verb adds itself; its callback sets `code`.
void AddDerive(CLI::App& app, int& code);
void AddRecover(CLI::App& app, int& code);
void AddCheck(CLI::App& app, int& code);
void AddCompile(CLI::App& app, int& code);
void AddNew(CLI::App& app, int& code);
void AddParadigm(CLI::App& app, int& code);
void AddWords(CLI::App& app, int& code);
void AddLaterVerbs(CLI::App& app, int& code);

}  // namespace tiersmith::cli
