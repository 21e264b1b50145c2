#include "lang/check/chip.h"

#include <algorithm>

#include "lang/check/arguments.h"
#include "lang/check/elements.h"
#include "lang/check/expression.h"
#include "lang/check/loops.h"
#include "lang/check/path.h"
#include "lang/check/remedies.h"
#include "lang/support/check.h"

namespace tarn {
namespace {

/// Canonical text of a place, `cell[0].q[2]`; nothing where an index is not known.
std::optional<std::string> place_text(Session& session, const Scope& scope, const ast::Path& path) {
  std::string result;
  bool known = true;
  for (const ast::Step& step : path.steps) {
    if (!result.empty()) result += ".";
    result += step.name.text;
    if (!step.index) continue;
    const auto index = to_count(session, evaluate(session, scope, *step.index), span_of(session, scope, *step.index));
    if (index && index->value) {
      result += fmt::format("[{}]", *index->value);
    } else {
      known = false;
    }
  }
  return known ? std::optional(result) : std::nullopt;
}

/// A place being declared: one name, perhaps with an index.
bool check_place_form(Session& session, const ast::Path& path) {
  if (path.steps.size() != 1 || path.call) {
    session.report(path.span, diag::place_form, excerpt(session, path.span)).remedy("`q` or `q[i]`");
    return false;
  }
  return check_declarable(session, path.steps.front().name);
}

bool take_place(Session& session, Unrolled& unrolled, const std::string& path, Span span, std::uint32_t qubit) {
  ++unrolled.placements;
  if (unrolled.placements > kMaxPlacements || unrolled.qubits.size() > kMaxQubits) {
    session.report(span, diag::too_many_places, kMaxPlacements, kMaxQubits);
    session.exhausted = true;
    return false;
  }
  if (unrolled.places.emplace(path, qubit).second) return true;
  auto tail = session.report(span, diag::place_taken, path);
  const auto& taken = unrolled.qubits;
  for (const InstanceQubit& other : taken) {
    if (other.path == path) tail.note(other.span, "first placed here");
  }
  return false;
}

NodeId own_s(Session& session, NodeId offset, Span span) {
  Graph& graph = session.graph;
  const NodeId s = graph.add({.op = NodeOp::s});
  const NodeId on = graph.add({.op = NodeOp::offsets_on});
  const NodeId shift = graph.add({.op = NodeOp::mul, .a = on, .b = offset, .span = span});
  const NodeId moved = graph.add({.op = NodeOp::add, .a = s, .b = shift, .span = span});
  const NodeId above = graph.add({.op = NodeOp::max, .a = moved, .b = graph.constant(0, kNumber, span), .span = span});
  return graph.add({.op = NodeOp::min, .a = above, .b = graph.constant(1, kNumber, span), .span = span});
}

class ChipWalk {
 public:
  ChipWalk(Session& session, Unrolled& unrolled, const ChipFrame& frame, const Scope& scope)
      : session_(session), unrolled_(unrolled), frame_(frame), scope_(scope) {}

  void places(const ast::Chip& chip) {
    for (const ast::ChipEntry& entry : chip.entries) {
      if (const auto* qubit = std::get_if<ast::QubitPlace>(&entry)) {
        for_each(session_, scope_, qubit->loops, [&](const Scope& scope) { place_qubit(scope, *qubit); });
      }
      if (const auto* nested = std::get_if<ast::ChipPlace>(&entry)) {
        for_each(session_, scope_, nested->loops, [&](const Scope& scope) { place_chip(scope, *nested); });
      }
    }
  }

  void terms(const ast::Chip& chip) {
    const TermPlace place{unrolled_, frame_.prefix.empty() ? "chip" : frame_.prefix.substr(0, frame_.prefix.size() - 1)};
    for (const ast::ChipEntry& entry : chip.entries) {
      if (const auto* coupler = std::get_if<ast::CouplerPlace>(&entry)) {
        for_each(session_, scope_, coupler->loops, [&](const Scope& scope) { place_coupler(scope, *coupler); });
      }
      if (const auto* energy = std::get_if<ast::EnergyTerm>(&entry)) elaborate_energy(session_, scope_, *energy, place);
      if (const auto* jump = std::get_if<ast::JumpTerm>(&entry)) elaborate_jump(session_, scope_, *jump, place);
      if (const auto* noise = std::get_if<ast::NoiseTerm>(&entry)) elaborate_noise(session_, scope_, *noise, place);
    }
  }

 private:
  std::optional<NodeId> offset_of(const Scope& scope, const ast::QubitPlace& place) {
    if (!place.offset) return std::nullopt;
    Site site{.where = "in `offset`"};
    site.operators = false;
    const Scope inner{&scope, scope.module, &site, {}};
    return evaluate_quantity(session_, inner, *place.offset, kNumber);
  }

  void place_qubit(const Scope& scope, const ast::QubitPlace& place) {
    if (!check_place_form(session_, place.place)) return;
    const auto text = place_text(session_, scope, place.place);
    const auto kind = resolve_callable(session_, scope, place.kind, {CallableKind::qubit}, "a qubit kind");
    const auto offset = offset_of(scope, place);
    if (!text) {
      if (kind && session_.generic) try_kind(*kind, {place.place.span}, place.kind.span);
      return;
    }
    const auto row = static_cast<std::uint32_t>(unrolled_.qubits.size());
    const std::string path = frame_.prefix + *text;
    if (!take_place(session_, unrolled_, path, place.place.span, row)) return;
    unrolled_.qubits.push_back({path, kind ? callable_name(*kind) : "", offset, place.place.span});
    unrolled_.qubit_s.push_back(offset ? own_s(session_, *offset, place.place.span)
                                       : session_.graph.add({.op = NodeOp::s}));
    if (kind) elaborate_kind(session_, *kind, {row}, {unrolled_, path}, place.kind.span);
  }

  void place_chip(const Scope& scope, const ast::ChipPlace& place) {
    if (!check_place_form(session_, place.place)) return;
    const auto text = place_text(session_, scope, place.place);
    const auto chip = resolve_callable(session_, scope, place.chip, {CallableKind::chip}, "a chip");
    if (!chip || !text) return;
    const std::string path = frame_.prefix + *text;
    if (!take_place(session_, unrolled_, path, place.place.span, kNoQubit)) return;
    unroll_chip(session_, *chip, path + ".", unrolled_, place.chip.span);
  }

  void place_coupler(const Scope& scope, const ast::CouplerPlace& place) {
    const auto left = find_qubit(session_, scope, place.left);
    const auto right = find_qubit(session_, scope, place.right);
    const auto kind = resolve_callable(session_, scope, place.kind, {CallableKind::coupler}, "a coupler kind");
    if (!left || !right) {
      if (kind && session_.generic) try_kind(*kind, {place.left.span, place.right.span}, place.kind.span);
      return;
    }
    if (*left == *right) {
      session_.report(cover(place.left.span, place.right.span), diag::self_coupling, unrolled_.qubits[*left].path);
      return;
    }
    if (!kind) return;
    const auto [low, high] = std::minmax(*left, *right);
    if (!unrolled_.couplers.insert({kind->item, low, high}).second) {
      session_.report(cover(place.left.span, place.right.span), diag::coupled_twice, callable_name(*kind),
                      unrolled_.qubits[low].path, unrolled_.qubits[high].path);
      return;
    }
    if (++unrolled_.placements > kMaxPlacements) {
      session_.report(place.kind.span, diag::too_many_places, kMaxPlacements, kMaxQubits);
      session_.exhausted = true;
      return;
    }
    const std::string where = unrolled_.qubits[*left].path + " -- " + unrolled_.qubits[*right].path;
    elaborate_kind(session_, *kind, {*left, *right}, {unrolled_, where}, place.kind.span);
  }

  /// Where places are not known: the arguments are checked on a place of its own.
  void try_kind(const Callable& kind, const std::vector<Span>& places, Span span) {
    Unrolled apart;
    std::vector<std::uint32_t> ends;
    for (const Span place : places) {
      ends.push_back(static_cast<std::uint32_t>(ends.size()));
      apart.qubits.push_back({excerpt(session_, place), {}, {}, {}});
      apart.qubit_s.push_back(session_.graph.add({.op = NodeOp::s}));
    }
    elaborate_kind(session_, kind, ends, {apart, ""}, span);
  }

  static constexpr std::uint32_t kNoQubit = UINT32_MAX;
  Session& session_;
  Unrolled& unrolled_;
  const ChipFrame& frame_;
  const Scope& scope_;
};

std::set<std::string> place_names(const ast::Chip& chip) {
  std::set<std::string> names;
  for (const ast::ChipEntry& entry : chip.entries) {
    if (const auto* qubit = std::get_if<ast::QubitPlace>(&entry)) names.insert(qubit->place.steps.front().name.text);
    if (const auto* nested = std::get_if<ast::ChipPlace>(&entry)) names.insert(nested->place.steps.front().name.text);
  }
  return names;
}

/// A place may not be called like an argument or a `let` of its chip.
void check_place_names(Session& session, const Scope& scope, const ast::Chip& chip) {
  const auto check = [&](const ast::Name& name) {
    const auto found = scope.names.find(name.text);
    if (found == scope.names.end()) return;
    session.report(name.span, diag::duplicate_name, name.text).note(found->second.span, "first declared here");
  };
  for (const ast::ChipEntry& entry : chip.entries) {
    if (const auto* qubit = std::get_if<ast::QubitPlace>(&entry)) check(qubit->place.steps.front().name);
    if (const auto* nested = std::get_if<ast::ChipPlace>(&entry)) check(nested->place.steps.front().name);
  }
}

void elaborate_chip(Session& session, const Callable& callable, Scope& scope, const std::string& prefix, Unrolled& unrolled) {
  const auto& chip = std::get<ast::Chip>(*callable.item);
  const ChipFrame frame{prefix, &unrolled, place_names(chip)};
  Site site{.where = "in a chip"};
  site.s = session.graph.add({.op = NodeOp::s});
  site.t = session.graph.add({.op = NodeOp::t, .dimension = kTime});
  site.chip = &frame;
  scope.site = &site;
  for (const ast::ChipEntry& entry : chip.entries) {
    if (const auto* let = std::get_if<ast::Let>(&entry)) declare_let(session, scope, *let);
  }
  check_place_names(session, scope, chip);
  ChipWalk walk(session, unrolled, frame, scope);
  walk.places(chip);
  for (const ast::ChipEntry& entry : chip.entries) {
    if (const auto* let = std::get_if<ast::Let>(&entry)) look_up(session, scope, let->name);
  }
  walk.terms(chip);
  scope.site = nullptr;
}

}  // namespace

void unroll_chip(Session& session, const Callable& chip, const std::string& prefix, Unrolled& unrolled, Span span) {
  const auto& active = session.active;
  if (std::find(active.begin(), active.end(), chip.item) != active.end()) {
    session.report(span, diag::cyclic_definition, callable_name(chip)).note(declaration_span(chip), "declared here");
    return;
  }
  Scope scope{nullptr, chip.module, nullptr, {}};
  if (!complete_arguments(session, chip, scope, span)) return;
  session.active.push_back(chip.item);
  {
    const FrameGuard frame(session, span, fmt::format("`{}` is used here", callable_name(chip)));
    elaborate_chip(session, chip, scope, prefix, unrolled);
  }
  session.active.pop_back();
}

void check_chip(Session& session, const Callable& chip) {
  Scope scope{nullptr, chip.module, nullptr, {}};
  Unrolled unrolled;
  declare_opaque(session, chip, scope);
  std::vector<const ast::NoiseTerm*> noise;
  for (const ast::ChipEntry& entry : std::get<ast::Chip>(*chip.item).entries) {
    if (const auto* term = std::get_if<ast::NoiseTerm>(&entry)) noise.push_back(term);
  }
  warn_of_repeated_noise(session, noise, scope);
  session.active.push_back(chip.item);
  elaborate_chip(session, chip, scope, "", unrolled);
  session.active.pop_back();
}

namespace {

/// Places are sorted by their text, not by their index: the smallest and the largest index of `name`.
std::optional<std::pair<std::int64_t, std::int64_t>> indices_of(const std::map<std::string, std::uint32_t>& places, const std::string& name) {
  std::optional<std::pair<std::int64_t, std::int64_t>> range;
  const std::string open = name + "[";
  for (auto at = places.lower_bound(open); at != places.end() && at->first.starts_with(open); ++at) {
    if (at->first.find(']', open.size()) + 1 != at->first.size()) continue;
    const std::int64_t index = std::stoll(at->first.substr(open.size()));
    range = range ? std::pair(std::min(range->first, index), std::max(range->second, index)) : std::pair(index, index);
  }
  return range;
}

/// The first part of `text` that names nothing decides: `cell[7].q[0]` has an index too large.
std::string place_remedy(const ChipFrame& frame, const std::string& text) {
  const auto& places = frame.unrolled->places;
  for (std::size_t dot = text.find('.'); true; dot = text.find('.', dot + 1)) {
    const std::string part = text.substr(0, dot);
    const std::string name = part.ends_with(']') ? part.substr(0, part.rfind('[')) : part;
    if (!places.contains(frame.prefix + part)) {
      const auto range = indices_of(places, frame.prefix + name);
      if (range) return fmt::format("`{}` has the indices `{} .. {}`", name, range->first, range->second);
      if (name != part && places.contains(frame.prefix + name)) return fmt::format("`{}` has no index", name);
      break;
    }
    if (dot == std::string::npos) break;
  }
  std::vector<std::string> known;
  for (const auto& [place, qubit] : places) {
    if (place.starts_with(frame.prefix) && qubit < frame.unrolled->qubits.size()) known.push_back(place.substr(frame.prefix.size()));
  }
  return offer(text, known, "qubits:");
}

}  // namespace

std::optional<std::uint32_t> find_qubit(Session& session, const Scope& scope, const ast::Path& path) {
  const ChipFrame* frame = scope.site != nullptr ? scope.site->chip : nullptr;
  if (frame == nullptr || path.call) {
    session.report(path.span, diag::place_expected, excerpt(session, path.span));
    return std::nullopt;
  }
  const auto text = place_text(session, scope, path);
  const auto& places = frame->unrolled->places;
  if (text) {
    const auto found = places.find(frame->prefix + *text);
    if (found != places.end() && found->second < frame->unrolled->qubits.size()) return found->second;
  }
  const bool declared = frame->roots.contains(path.steps.front().name.text);
  if (declared && (!text || session.generic)) return std::nullopt;
  // A place that is declared but was never placed had an error of its own.
  const auto first = places.lower_bound(frame->prefix + path.steps.front().name.text);
  const bool placed = first != places.end() && first->first.starts_with(frame->prefix + path.steps.front().name.text);
  if (declared && !placed && session.diagnostics.has_errors()) return std::nullopt;
  session.report(path.span, diag::unknown_place, frame->prefix + text.value_or(excerpt(session, path.span)))
      .remedy(place_remedy(*frame, text.value_or(path.steps.front().name.text)));
  return std::nullopt;
}

}  // namespace tarn
