#include "lang/syntax/builder.h"

namespace tarn {

void Builder::item(SyntaxNodeId id) {
  const Tag tag = node(id).tag;
  if (tag == Tag::use_item) ast_.items.emplace_back(use_item(id));
  if (tag == Tag::parameter) ast_.items.emplace_back(ast::Parameter{span(id), arg(children(id).front())});
  if (tag == Tag::let) ast_.items.emplace_back(let(id));
  if (tag == Tag::law) ast_.items.emplace_back(law(id));
  if (tag == Tag::bath) ast_.items.emplace_back(bath(id));
  if (tag == Tag::kind) ast_.items.emplace_back(kind(id));
  if (tag == Tag::chip) ast_.items.emplace_back(chip(id));
  if (tag == Tag::experiment) ast_.items.emplace_back(experiment(id));
}

std::optional<ast::ExprId> Builder::child_value(SyntaxNodeId id, Tag tag) {
  const std::optional<SyntaxNodeId> found = child(id, tag);
  if (!found) return std::nullopt;
  return expression(children(*found).front());
}

std::optional<ast::TypeText> Builder::type(SyntaxNodeId id) {
  const std::optional<SyntaxNodeId> found = child(id, Tag::type);
  if (!found) return std::nullopt;
  const Span place = span(*found);
  const std::vector<SyntaxNodeId> parts = children(*found);
  if (!parts.empty()) {
    std::optional<ast::UnitText> bracket = unit(parts.front());
    if (!bracket) return std::nullopt;
    return ast::TypeText{place, *std::move(bracket)};
  }
  const Code code = first_code(*found);
  if (code == Code::qubit) return ast::TypeText{place, ast::PartType::qubit};
  if (code == Code::coupler) return ast::TypeText{place, ast::PartType::coupler};
  if (code == Code::schedule) return ast::TypeText{place, ast::PartType::schedule};
  if (code == Code::bath) return ast::TypeText{place, ast::PartType::bath};
  return ast::TypeText{place, name(*found)};
}

ast::Arg Builder::arg(SyntaxNodeId id) {
  ast::Arg result;
  result.span = span(id);
  result.name = name(children(id).front());
  result.type = type(id);
  result.value = child_value(id, Tag::value);
  if (const auto found = child(id, Tag::range)) result.range = range(*found);
  if (const auto found = child(id, Tag::spread)) {
    const std::vector<SyntaxNodeId> parts = children(*found);
    const bool adds = first_code(parts.front()) == Code::plus;
    result.spread = ast::Spread{span(*found), adds ? ast::SpreadOp::add : ast::SpreadOp::multiply, path(parts.back())};
  }
  return result;
}

std::vector<ast::Arg> Builder::args(SyntaxNodeId id) {
  std::vector<ast::Arg> result;
  if (const auto list = child(id, Tag::args)) {
    for (const SyntaxNodeId c : children(*list)) result.push_back(arg(c));
  }
  return result;
}

ast::UseItem Builder::use_item(SyntaxNodeId id) {
  ast::UseItem result{span(id), name(children(id).back()), std::nullopt, {}};
  if (const auto file = child(id, Tag::text)) result.file = quoted(*file);
  return result;
}

ast::Let Builder::let(SyntaxNodeId id) {
  return {span(id), name(children(id).front()), *child_value(id, Tag::value), {}};
}

ast::Law Builder::law(SyntaxNodeId id) {
  ast::Law result;
  result.span = span(id);
  const Code word = first_code(id);
  result.kind = word == Code::schedule   ? ast::LawKind::schedule
                : word == Code::spectrum ? ast::LawKind::spectrum
                : word == Code::psd      ? ast::LawKind::psd
                                         : ast::LawKind::function;
  result.name = name(*child(id, Tag::name));
  result.args = args(id);
  result.result = type(id);
  result.value = *child_value(id, Tag::value);
  return result;
}

ast::BathValue Builder::bath_value(SyntaxNodeId id) {
  const Code word = first_code(id);
  const ast::BathSetting setting = word == Code::density       ? ast::BathSetting::density
                                   : word == Code::psd         ? ast::BathSetting::psd
                                   : word == Code::temperature ? ast::BathSetting::temperature
                                   : word == Code::width       ? ast::BathSetting::width
                                                               : ast::BathSetting::shift;
  return {span(id), token_span(node(id).begin), setting, expression(children(id).front())};
}

ast::Bath Builder::bath(SyntaxNodeId id) {
  ast::Bath result;
  result.span = span(id);
  result.name = name(*child(id, Tag::name));
  result.args = args(id);
  for (const SyntaxNodeId c : children(id)) {
    if (node(c).tag == Tag::let) result.entries.emplace_back(let(c));
    if (node(c).tag == Tag::bath_value) result.entries.emplace_back(bath_value(c));
    if (node(c).tag == Tag::bath_band) {
      result.entries.emplace_back(ast::BathBand{span(c), range(children(c).front())});
    }
  }
  return result;
}

ast::Loop Builder::loop(SyntaxNodeId id) {
  ast::Loop result;
  result.span = span(id);
  std::vector<ast::ExprId> bounds;
  for (const SyntaxNodeId c : children(id)) {
    if (node(c).tag == Tag::name) {
      result.names.push_back(name(c));
    } else if (node(c).tag == Tag::where) {
      result.where = expression(children(c).front());
    } else {
      bounds.push_back(expression(c));
    }
  }
  result.first = bounds.front();
  if (bounds.size() > 1) result.last = bounds.back();
  return result;
}

std::vector<ast::Loop> Builder::loops(SyntaxNodeId id) {
  std::vector<ast::Loop> result;
  for (const SyntaxNodeId c : children(id)) {
    if (node(c).tag == Tag::loop) result.push_back(loop(c));
  }
  return result;
}

ast::EnergyTerm Builder::energy(SyntaxNodeId id) {
  const ast::ExprId value = expression(children(id).front());
  return {span(id), value, loops(id)};
}

ast::JumpTerm Builder::jump(SyntaxNodeId id) {
  const ast::ExprId value = expression(children(id).front());
  return {span(id), value, loops(id)};
}

ast::NoiseTerm Builder::noise(SyntaxNodeId id) {
  ast::NoiseTerm result;
  result.span = span(id);
  result.shared = child(id, Tag::shared).has_value();
  for (const SyntaxNodeId c : children(*child(id, Tag::operators))) result.operators.push_back(expression(c));
  result.bath = path(*child(id, Tag::path));
  result.loops = loops(id);
  if (const auto found = child(id, Tag::correlation)) {
    const std::vector<SyntaxNodeId> parts = children(*found);
    result.correlation = ast::Correlation{span(*found), name(parts[0]), name(parts[1]), expression(parts[2])};
  }
  return result;
}

ast::Kind Builder::kind(SyntaxNodeId id) {
  ast::Kind result;
  result.span = span(id);
  result.element = first_code(id) == Code::qubit ? ast::ElementKind::qubit : ast::ElementKind::coupler;
  result.name = name(*child(id, Tag::name));
  result.args = args(id);
  for (const SyntaxNodeId c : children(id)) {
    if (node(c).tag == Tag::let) result.entries.emplace_back(let(c));
    if (node(c).tag == Tag::energy) result.entries.emplace_back(energy(c));
    if (node(c).tag == Tag::jump) result.entries.emplace_back(jump(c));
    if (node(c).tag == Tag::noise) result.entries.emplace_back(noise(c));
  }
  return result;
}

ast::QubitPlace Builder::qubit_place(SyntaxNodeId id) {
  const std::vector<SyntaxNodeId> parts = children(id);
  ast::QubitPlace result{span(id), path(parts[0]), path(parts[1]), child_value(id, Tag::offset), {}};
  result.loops = loops(id);
  return result;
}

ast::ChipPlace Builder::chip_place(SyntaxNodeId id) {
  const std::vector<SyntaxNodeId> parts = children(id);
  return {span(id), path(parts[0]), path(parts[1]), loops(id)};
}

ast::CouplerPlace Builder::coupler_place(SyntaxNodeId id) {
  const std::vector<SyntaxNodeId> parts = children(id);
  return {span(id), path(parts[0]), path(parts[1]), path(parts[2]), loops(id)};
}

ast::Chip Builder::chip(SyntaxNodeId id) {
  ast::Chip result;
  result.span = span(id);
  result.name = name(*child(id, Tag::name));
  result.args = args(id);
  for (const SyntaxNodeId c : children(id)) {
    if (node(c).tag == Tag::let) result.entries.emplace_back(let(c));
    if (node(c).tag == Tag::qubit_place) result.entries.emplace_back(qubit_place(c));
    if (node(c).tag == Tag::chip_place) result.entries.emplace_back(chip_place(c));
    if (node(c).tag == Tag::coupler_place) result.entries.emplace_back(coupler_place(c));
    if (node(c).tag == Tag::energy) result.entries.emplace_back(energy(c));
    if (node(c).tag == Tag::jump) result.entries.emplace_back(jump(c));
    if (node(c).tag == Tag::noise) result.entries.emplace_back(noise(c));
  }
  return result;
}

}  // namespace tarn
