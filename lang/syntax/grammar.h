#pragma once
/// \file The grammar of declarations, blocks and statements, as in grammar_expression.h.

#include <string_view>

#include "lang/syntax/grammar_expression.h"

namespace tarn::grammar {

// ---- Declarations ------------------------------------------------------------------

struct type : peg::sor<any_word, bracket> {
  static constexpr Tag tag = Tag::type;
  static constexpr std::string_view expected = "a type such as `number`, `frequency` or `[1/us]`";
};
struct typed : peg::seq<token<Code::colon>, type> {};
struct value : peg::seq<token<Code::assign>, expr> {
  static constexpr Tag tag = Tag::value;
};
struct spread : peg::seq<token<Code::spread>, op<Code::plus, Code::times>, path> {
  static constexpr Tag tag = Tag::spread;
};
struct arg : peg::seq<name, peg::opt<typed>, peg::opt<value>, peg::opt<token<Code::in>, range>, peg::opt<spread>> {
  static constexpr Tag tag = Tag::arg;
};
struct args : peg::seq<token<Code::open_round>, peg::opt<list<arg>>, token<Code::close_round>> {
  static constexpr Tag tag = Tag::args;
};
struct use_item : peg::seq<token<Code::use>, peg::sor<name, peg::seq<text, token<Code::as>, name>>> {
  static constexpr Tag tag = Tag::use_item;
};
struct parameter : peg::seq<token<Code::parameter>, arg> {
  static constexpr Tag tag = Tag::parameter;
};
struct let : peg::seq<token<Code::let>, name, value> {
  static constexpr Tag tag = Tag::let;
};
struct law : peg::seq<any_of<Code::schedule, Code::spectrum, Code::psd, Code::function>, name, args, peg::opt<typed>,
                      value> {
  static constexpr Tag tag = Tag::law;
};

// ---- Blocks and recovery -----------------------------------------------------------

struct anything : peg::any {};
struct raw_name : peg::range<static_cast<char>(kFirstName), static_cast<char>(kLastName)> {};

/// The start of an item that no entry of a block looks like: a block that reaches one
/// was not closed.
struct item_head
    : peg::sor<peg::seq<any_of<Code::use, Code::parameter, Code::experiment, Code::spectrum, Code::function,
                               Code::schedule, Code::bath>,
                        peg::sor<raw_name, any_of<Code::text>>>,
               peg::seq<any_of<Code::qubit, Code::coupler>, raw_name, any_of<Code::open_curly, Code::open_round>>,
               peg::seq<any_of<Code::chip>, raw_name, any_of<Code::open_curly>>> {};
struct item_word
    : any_of<Code::use, Code::parameter, Code::let, Code::schedule, Code::spectrum, Code::psd, Code::function,
             Code::bath, Code::qubit, Code::coupler, Code::chip, Code::experiment> {};
struct entry_word
    : any_of<Code::let, Code::psd, Code::qubit, Code::coupler, Code::chip, Code::density, Code::temperature,
             Code::width, Code::shift, Code::band, Code::energy, Code::jump, Code::noise, Code::begin, Code::pace,
             Code::equation, Code::levels, Code::trajectories, Code::ensemble, Code::freeze, Code::observe,
             Code::scan, Code::sweep, Code::data, Code::compare, Code::fit, Code::expect, Code::tolerance> {};
/// `shift = off` and `(x : bath)` hold such words without starting anything.
struct no_start : any_of<Code::assign, Code::comma, Code::close_round> {};
struct item_start : peg::seq<item_word, peg::not_at<no_start>> {};
struct entry_start : peg::seq<entry_word, peg::not_at<no_start>> {};

/// Moves on to where the statement at hand failed, at least one token, and has the
/// state note the failure.
struct to_failure {
  using rule_t = to_failure;
  using subs_t = peg::empty_list;

  template <peg::apply_mode, peg::rewind_mode, template <class...> class Action, template <class...> class Control,
            class Input, class State>
  static bool match(Input& in, State& state) {
    if (in.empty()) return false;
    std::size_t length = state.note_failure(in.byte());
    // `use spectrum`, `qubit bath {`: there the word stands for a name and starts nothing of its own.
    const auto code = [&](std::size_t k) { return in.size(k + 1) > k ? static_cast<Code>(in.peek_char(k)) : Code{}; };
    const bool library = code(0) == Code::use && code(1) == Code::spectrum;
    const bool named = code(2) == Code::assign || code(2) == Code::colon || code(2) == Code::open_curly;
    if (length == 1 && is_reserved(code(1)) && (library || named)) ++length;
    in.bump(length);
    return true;
  }
};

struct balanced;
struct inside : peg::sor<balanced, peg::seq<peg::not_at<peg::sor<item_head, any_of<Code::close_curly>>>, anything>> {};
struct balanced : peg::seq<any_of<Code::open_curly>, peg::star<inside>, peg::opt<any_of<Code::close_curly>>> {};
struct skipped : peg::sor<balanced, anything> {};

struct entry_stop : peg::sor<item_head, entry_start, any_of<Code::close_curly>, peg::eof> {};
struct skip_entry : peg::seq<peg::not_at<peg::sor<item_head, any_of<Code::close_curly>>>, to_failure,
                             peg::until<peg::at<entry_stop>, skipped>> {};
struct skip_item : peg::seq<to_failure, peg::until<peg::at<peg::sor<item_start, peg::eof>>, skipped>> {};

struct open_block : token<Code::open_curly> {};
struct close_block : any_of<Code::close_curly> {};
struct not_closed : peg::success {};

template <class Entry>
struct block : peg::seq<open_block, peg::star<peg::sor<Entry, skip_entry>>, peg::sor<close_block, not_closed>> {};

// ---- Parts of a chip ---------------------------------------------------------------

struct bath_value
    : peg::seq<any_of<Code::density, Code::psd, Code::temperature, Code::width, Code::shift>, expr> {
  static constexpr Tag tag = Tag::bath_value;
};
struct bath_band : peg::seq<any_of<Code::band>, range> {
  static constexpr Tag tag = Tag::bath_band;
};
struct bath_entry : peg::sor<let, bath_value, bath_band> {
  static constexpr std::string_view expected = "a setting of the bath (`density`, `temperature`, ...) or `}`";
};
struct bath : peg::seq<token<Code::bath>, name, peg::opt<args>, block<bath_entry>> {
  static constexpr Tag tag = Tag::bath;
};

struct where : peg::seq<token<Code::where>, expr> {
  static constexpr Tag tag = Tag::where;
};
struct loop : peg::seq<token<Code::for_>, list<name>, token<Code::in>, expr, peg::opt<token<Code::range>, expr>,
                       peg::opt<where>> {
  static constexpr Tag tag = Tag::loop;
};
struct loops : peg::star<loop> {};
struct correlation : peg::seq<token<Code::correlation>, token<Code::open_round>, name, token<Code::comma>, name,
                              token<Code::close_round>, token<Code::assign>, expr> {
  static constexpr Tag tag = Tag::correlation;
};
struct shared : token<Code::shared> {
  static constexpr Tag tag = Tag::shared;
};
struct operators : list<expr> {
  static constexpr Tag tag = Tag::operators;
};
struct energy : peg::seq<any_of<Code::energy>, expr, loops> {
  static constexpr Tag tag = Tag::energy;
};
struct jump : peg::seq<any_of<Code::jump>, expr, loops> {
  static constexpr Tag tag = Tag::jump;
};
struct noise : peg::seq<any_of<Code::noise>, peg::opt<shared>, operators, token<Code::tilde>, path, loops,
                        peg::opt<correlation>> {
  static constexpr Tag tag = Tag::noise;
};
struct term : peg::sor<energy, jump, noise> {};
struct kind_entry : peg::sor<let, term> {
  static constexpr std::string_view expected = "`energy`, `noise`, `jump`, `let` or `}`";
};
struct kind : peg::seq<any_of<Code::qubit, Code::coupler>, name, peg::opt<args>, block<kind_entry>> {
  static constexpr Tag tag = Tag::kind;
};

struct offset : peg::seq<token<Code::offset>, expr> {
  static constexpr Tag tag = Tag::offset;
};
struct qubit_place
    : peg::seq<any_of<Code::qubit>, path, token<Code::colon>, path, peg::opt<offset>, loops> {
  static constexpr Tag tag = Tag::qubit_place;
};
struct chip_place : peg::seq<any_of<Code::chip>, path, token<Code::colon>, path, loops> {
  static constexpr Tag tag = Tag::chip_place;
};
struct coupler_place : peg::seq<any_of<Code::coupler>, path, token<Code::link>, path, token<Code::colon>, path, loops> {
  static constexpr Tag tag = Tag::coupler_place;
};
struct chip_entry : peg::sor<let, qubit_place, chip_place, coupler_place, term> {
  static constexpr std::string_view expected =
      "`qubit`, `coupler`, `chip`, `energy`, `noise`, `jump`, `let` or `}`";
};
struct chip : peg::seq<any_of<Code::chip>, name, peg::opt<args>, block<chip_entry>> {
  static constexpr Tag tag = Tag::chip;
};

// ---- Experiments -------------------------------------------------------------------

struct chip_use : peg::seq<any_of<Code::chip>, path> {
  static constexpr Tag tag = Tag::chip_use;
};
struct begin : peg::seq<any_of<Code::begin>, expr> {
  static constexpr Tag tag = Tag::begin;
};
struct start_piece : peg::seq<any_of<Code::start>, expr> {
  static constexpr Tag tag = Tag::start_piece;
};
struct ramp_piece : peg::seq<any_of<Code::ramp>, token<Code::to>, expr, token<Code::over>, expr> {
  static constexpr Tag tag = Tag::ramp_piece;
};
struct hold_piece : peg::seq<any_of<Code::hold>, token<Code::for_>, expr> {
  static constexpr Tag tag = Tag::hold_piece;
};
struct step_piece : peg::seq<any_of<Code::step>, token<Code::to>, expr> {
  static constexpr Tag tag = Tag::step_piece;
};
struct follow_piece : peg::seq<any_of<Code::follow>, path> {
  static constexpr Tag tag = Tag::follow_piece;
};
struct piece : peg::sor<start_piece, ramp_piece, hold_piece, step_piece, follow_piece> {
  static constexpr std::string_view expected = "`start`, `ramp`, `hold`, `step` or `follow`";
};
struct pace : peg::seq<any_of<Code::pace>, list<piece>> {
  static constexpr Tag tag = Tag::pace;
};
struct choice : peg::sor<peg::seq<name, more<Code::assign>, path>, path> {
  static constexpr Tag tag = Tag::choice;
};
struct each : peg::seq<token<Code::each>, token<Code::of>, token<Code::open_round>, list<choice>,
                       token<Code::close_round>> {
  static constexpr Tag tag = Tag::each;
};
struct equation : peg::seq<any_of<Code::equation>, peg::sor<each, path>> {
  static constexpr Tag tag = Tag::equation;
};
struct levels : peg::seq<any_of<Code::levels>, peg::sor<token<Code::auto_>, expr>> {
  static constexpr Tag tag = Tag::levels;
};
struct seed : peg::seq<token<Code::seed>, expr> {
  static constexpr Tag tag = Tag::seed;
};
struct draws : peg::seq<any_of<Code::trajectories, Code::ensemble, Code::freeze>, expr, peg::opt<seed>> {
  static constexpr Tag tag = Tag::draws;
};
struct unit_in : peg::seq<token<Code::in>, bracket> {
  static constexpr Tag tag = Tag::unit_in;
};
struct at_end : token<Code::end_> {
  static constexpr Tag tag = Tag::at_end;
};
struct first : token<Code::first> {
  static constexpr Tag tag = Tag::first;
};
struct last : token<Code::last> {
  static constexpr Tag tag = Tag::last;
};
struct at_point : peg::seq<name, token<Code::assign>, expr, peg::opt<peg::sor<first, last>>> {
  static constexpr Tag tag = Tag::at_point;
  static constexpr std::string_view expected = "`t =` or `s =`";
};
struct along : peg::seq<token<Code::along>, expr> {
  static constexpr Tag tag = Tag::along;
};
struct when_seen : peg::sor<peg::seq<token<Code::at>, peg::sor<at_end, at_point>>, along> {};
struct observe
    : peg::seq<any_of<Code::observe>, name, peg::opt<value>, peg::opt<unit_in>, peg::opt<when_seen>> {
  static constexpr Tag tag = Tag::observe;
};
struct scan : peg::seq<any_of<Code::scan>, name, token<Code::over>, expr> {
  static constexpr Tag tag = Tag::scan;
};
struct axis : peg::seq<path, token<Code::over>, expr> {
  static constexpr Tag tag = Tag::axis;
};
struct together : peg::seq<any_of<Code::together>, peg::at<name>> {
  static constexpr Tag tag = Tag::together;
};
struct sweep : peg::seq<any_of<Code::sweep>, peg::opt<together>, list<axis>> {
  static constexpr Tag tag = Tag::sweep;
};
struct data : peg::seq<any_of<Code::data>, name, token<Code::assign>, path> {
  static constexpr Tag tag = Tag::data;
};
struct compare : peg::seq<any_of<Code::compare>, name, token<Code::with>, name> {
  static constexpr Tag tag = Tag::compare;
};
struct fit_each : peg::seq<token<Code::each>, path> {
  static constexpr Tag tag = Tag::fit_each;
};
struct fit : peg::seq<any_of<Code::fit>, list<path>, token<Code::to>, name, peg::opt<fit_each>> {
  static constexpr Tag tag = Tag::fit;
};
struct expect : peg::seq<any_of<Code::expect>, expr, peg::opt<where>> {
  static constexpr Tag tag = Tag::expect;
};
struct tolerance : peg::seq<any_of<Code::tolerance>, expr> {
  static constexpr Tag tag = Tag::tolerance;
};
struct statement : peg::sor<let, chip_use, begin, pace, equation, levels, draws, observe, scan, sweep, data, compare,
                            fit, expect, tolerance> {
  static constexpr std::string_view expected = "a statement of the experiment";
};
struct experiment : peg::seq<token<Code::experiment>, name, block<statement>> {
  static constexpr Tag tag = Tag::experiment;
};

// ---- A file ------------------------------------------------------------------------

struct item : peg::sor<use_item, parameter, let, law, bath, kind, chip, experiment> {
  static constexpr std::string_view expected =
      "a declaration (`parameter`, `schedule`, `bath`, `qubit`, `chip`, `experiment`, ...)";
};
struct file : peg::seq<peg::star<peg::sor<item, skip_item>>, peg::eof> {};

}  // namespace tarn::grammar
