// PEGTL's own analysis finds rules that could loop without consuming anything.
#include "lang/syntax/grammar.h"

#include <catch2/catch.hpp>
#include <tao/pegtl/contrib/analyze.hpp>

namespace TAO_PEGTL_NAMESPACE {
template <class Name>
struct analyze_traits<Name, tarn::grammar::to_failure> : analyze_any_traits<> {};
}  // namespace TAO_PEGTL_NAMESPACE

TEST_CASE("no rule of the grammar can loop in place") {
  CHECK(tao::pegtl::analyze<tarn::grammar::file>(1) == 0);
}
