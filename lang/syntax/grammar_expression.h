#pragma once
/// \file The grammar of names, units and expressions, rule by rule as in the reference, over
/// tokens (one byte each, see tokens.h). `tag`: the rule leaves a node. `expected`: what a
/// message says was expected where the rule cannot even start.

#include <string_view>
#include <tao/pegtl.hpp>

#include "lang/syntax/nodes.h"

namespace tarn::grammar {

namespace peg = tao::pegtl;

template <Code C>
struct token : peg::one<static_cast<char>(C)> {
  static constexpr Code code = C;  ///< Expected as it is spelt.
};
/// A token that may go on with something already complete: not worth a message.
template <Code C>
struct more : peg::one<static_cast<char>(C)> {};
template <Code... Cs>
struct any_of : peg::one<static_cast<char>(Cs)...> {};
template <class Rule, class Separator = token<Code::comma>>
struct list : peg::list<Rule, Separator> {};

// ---- Names, paths and units --------------------------------------------------------

struct name : peg::range<static_cast<char>(kFirstName), static_cast<char>(kLastName)> {
  static constexpr Tag tag = Tag::name;
  static constexpr std::string_view expected = "a name";
};
struct any_word : peg::range<static_cast<char>(kFirstName), static_cast<char>(kLastReserved)> {};

struct expr;

struct index : peg::seq<more<Code::open_square>, expr, token<Code::close_square>> {};
struct step : peg::seq<name, peg::opt<index>> {
  static constexpr Tag tag = Tag::step;
};
struct given_name : any_word {
  static constexpr Tag tag = Tag::given_name;
};
struct given : peg::sor<peg::seq<given_name, more<Code::assign>, expr>, expr> {
  static constexpr Tag tag = Tag::given;
};
struct call : peg::seq<more<Code::open_round>, peg::opt<list<given>>, token<Code::close_round>> {
  static constexpr Tag tag = Tag::call;
};
struct path : peg::seq<step, peg::star<more<Code::dot>, step>, peg::opt<call>> {
  static constexpr Tag tag = Tag::path;
  static constexpr std::string_view expected = "a name";
};

struct number_token : any_of<Code::number, Code::one> {};
struct unit_word : peg::sor<name, any_of<Code::percent>> {};
struct exponent : number_token {
  static constexpr std::string_view expected = "an exponent such as `2` or `0.5`";
};
struct factor : peg::seq<unit_word, peg::opt<more<Code::caret>, exponent>> {
  static constexpr std::string_view expected = "a unit";
};
struct bracket : peg::seq<token<Code::open_square>, peg::sor<any_of<Code::one>, factor>,
                          peg::star<any_of<Code::times, Code::over_sign>, factor>, token<Code::close_square>> {
  static constexpr Tag tag = Tag::bracket;
  static constexpr std::string_view expected = "a unit in brackets";
};
struct unit : any_of<Code::unit_word, Code::percent> {
  static constexpr Tag tag = Tag::unit;
};

// ---- Expressions -------------------------------------------------------------------

template <Code... Cs>
struct op : any_of<Cs...> {
  static constexpr Tag tag = Tag::op;
  static constexpr std::string_view expected = "an operator";
};

struct number_unit : peg::sor<peg::seq<peg::at<any_of<Code::open_square>>, bracket>,
                              peg::seq<unit, peg::not_at<any_of<Code::caret>>>> {
  static constexpr std::string_view expected = "";
};
/// `pi` alone is a name like any other; before a unit it is a number.
struct number : peg::sor<peg::seq<number_token, peg::opt<number_unit>>, peg::seq<any_of<Code::pi>, number_unit>> {
  static constexpr Tag tag = Tag::number;
};
struct text : any_of<Code::text> {
  static constexpr Tag tag = Tag::text;
  static constexpr std::string_view expected = "a text in quotes";
};
struct ketbra : peg::seq<any_of<Code::ketbra>, peg::opt<more<Code::open_round>, list<path>, token<Code::close_round>>> {
  static constexpr Tag tag = Tag::ketbra;
};
struct paren : peg::seq<more<Code::open_round>, expr, token<Code::close_round>> {
  static constexpr Tag tag = Tag::paren;
};
struct held : peg::seq<more<Code::when>, path, token<Code::is>, text> {
  static constexpr Tag tag = Tag::held;
};
struct under : peg::seq<more<Code::under>, name> {
  static constexpr Tag tag = Tag::under;
};
struct use : peg::seq<path, peg::star<held>, peg::opt<under>> {
  static constexpr Tag tag = Tag::use;
};
struct atom : peg::sor<number, text, ketbra, paren, use> {
  static constexpr std::string_view expected = "a value";
};

struct sign;
struct power : peg::seq<atom, peg::opt<op<Code::caret>, sign>> {
  static constexpr Tag tag = Tag::power;
};
struct sign : peg::sor<peg::seq<op<Code::minus, Code::link>, sign>, power> {
  static constexpr Tag tag = Tag::sign;
  static constexpr std::string_view expected = "a value";
};
struct product : list<sign, op<Code::times, Code::over_sign>> {
  static constexpr Tag tag = Tag::product;
};
struct sum : list<product, op<Code::plus, Code::minus>> {
  static constexpr Tag tag = Tag::sum;
};
struct compare_op : op<Code::less_equal, Code::greater_equal, Code::equal, Code::not_equal, Code::less, Code::greater> {};
struct comparison : peg::seq<sum, peg::opt<compare_op, sum>> {
  static constexpr Tag tag = Tag::comparison;
};
struct truth;
struct negation : peg::seq<more<Code::not_>, truth> {
  static constexpr Tag tag = Tag::negation;
};
struct truth : peg::sor<negation, comparison> {};
struct both : list<truth, op<Code::and_>> {
  static constexpr Tag tag = Tag::both;
};
struct either : list<both, op<Code::or_>> {
  static constexpr Tag tag = Tag::either;
};
struct choice_expr
    : peg::seq<more<Code::if_>, expr, token<Code::then>, expr, token<Code::else_>, expr> {
  static constexpr Tag tag = Tag::choice_expr;
};
struct expr : peg::sor<choice_expr, either> {
  static constexpr std::string_view expected = "a value";
};

struct range : peg::seq<expr, token<Code::range>, expr> {
  static constexpr Tag tag = Tag::range;
};

}  // namespace tarn::grammar
