// Running a compiled grammar: forward to derive, inverted to recover.
#pragma once

#include <memory>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "compile/cascade.h"
#include "model/readings.h"
#include "model/text.h"
#include "run/word_graph.h"

namespace tiersmith {

class Runner {
 public:
  Runner(const Grammar& grammar, const Cascade& cascade);
  ~Runner();

  // Underlying text -> surface text. Errors: an unknown character, a symbol that may not stand there, a form
  // whose result no symbol spells. Not thread-safe.
  // Where rules are optional, the likeliest surface.
  bool Derive(std::string_view underlying, std::string* surface, TextError* error);

  // The same with all ways that optional rules leave open: the `best` likeliest surfaces, likeliest first, those that are
  // written alike summed. `more`: there are others.
  struct Output {
    std::string surface;
    double probability = 1;
  };
  bool DeriveAll(std::string_view underlying, std::size_t best, std::vector<Output>* outputs, bool* more,
                 TextError* error);
  // The same of a form that was read already (model/readings.h), with the tags of its morphemes.
  bool DeriveAll(const Reading& underlying, std::size_t best, std::vector<Output>* outputs, bool* more,
                 TextError* error);
  // Has the grammar optional rules?
  bool weighted() const;

  // The machine's answer on a form, for agreement tests. `form` is none if the form is outside the machine's domain; the
  // flags are raised only by machines compiled for testing.
  struct Answer {
    std::optional<Form> form;                       // the likeliest
    std::vector<std::pair<Form, double>> outcomes;  // all, each once, with their probabilities
    bool ambiguous = false;
    bool reaches = false;
    bool unsure = false;
  };
  Answer Apply(const Form& underlying);

  struct Candidate {
    std::string form;      // "in-posible"
    int restorations = 0;  // slots and boundaries restored
    double weight = 0;     // negative natural log of the probability that this form comes out so; 0 if it always does
    std::string gloss;     // of words, where only words are asked for
  };
  struct Candidates {
    std::vector<Candidate> best;  // fewest restorations first, then likeliest
    bool infinite = false;
    std::string infinite_why;  // "any number of h (rule 'h deletion')"
    bool more = false;         // the list was cut at the number asked for
  };
  // Surface text -> candidate underlying forms.
  bool Recover(std::string_view surface, std::size_t best, Candidates* candidates, TextError* error);
  // From here on Recover gives only words of this graph. `left_out`: pieces with letters the grammar was not compiled for.
  void AllowOnly(const WordGraph& words, std::vector<std::string>* left_out);
  // Is this underlying form among the candidates of this surface form? By composition, not by listing.
  bool IsCandidate(std::string_view underlying, std::string_view surface, bool* answer, TextError* error);

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace tiersmith
