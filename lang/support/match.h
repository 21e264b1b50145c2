#pragma once
/// \file std::visit with a lambda for each case.

namespace tarn {

/// std::visit(Match{[](const A&) ..., [](const B&) ...}, variant).
template <class... Cases>
struct Match : Cases... {
  using Cases::operator()...;
};
template <class... Cases>
Match(Cases...) -> Match<Cases...>;

}  // namespace tarn
