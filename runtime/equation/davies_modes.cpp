#include "runtime/equation/davies_modes.h"

#include <algorithm>
#include <complex>
#include <vector>

#include "runtime/linear/general.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Index = Eigen::Index;

/// A part of the map that feeds no other and is fed by none.
struct Part {
  std::vector<std::uint32_t> pairs;  ///< a + K b, ascending.
  Eigen::MatrixXcd map;
};

/// The part that holds the pairs in `seeds`.
Part part_of(const DaviesTable& table, const Eigen::VectorXd& energies, const std::vector<std::uint32_t>& seeds) {
  const Index levels = energies.size();
  std::vector<std::uint32_t> root(static_cast<std::size_t>(levels * levels));
  for (std::uint32_t p = 0; p < root.size(); ++p) root[p] = p;
  const auto find = [&](std::uint32_t p) {
    while (root[p] != p) p = root[p] = root[root[p]];
    return p;
  };
  for (const auto& term : table.terms) root[find(table.coupled[term.target])] = find(table.coupled[term.source]);
  for (const std::uint32_t seed : seeds) root[find(seed)] = find(seeds.front());
  Part part;
  std::vector<Index> place(root.size(), -1);
  for (std::uint32_t p = 0; p < root.size(); ++p) {
    if (find(p) != find(seeds.front())) continue;
    place[p] = static_cast<Index>(part.pairs.size());
    part.pairs.push_back(p);
  }
  const auto size = static_cast<Index>(part.pairs.size());
  part.map = Eigen::MatrixXcd::Zero(size, size);
  for (Index i = 0; i < size; ++i) {
    const std::uint32_t p = part.pairs[static_cast<std::size_t>(i)];
    const Index a = p % levels, b = p / levels;
    part.map(i, i) = table.loss(a, b) - Complex(0, energies[a] + table.shift[a] - energies[b] - table.shift[b]);
  }
  for (const auto& term : table.terms) {
    const Index target = place[table.coupled[term.target]], source = place[table.coupled[term.source]];
    if (target >= 0 && source >= 0) part.map(target, source) += term.value;
  }
  return part;
}

std::uint32_t pair(Index a, Index b, Index levels) { return static_cast<std::uint32_t>(a + levels * b); }

std::vector<std::uint32_t> populations(Index levels) {
  std::vector<std::uint32_t> pairs;
  for (Index a = 0; a < levels; ++a) pairs.push_back(pair(a, a, levels));
  return pairs;
}

Index place_in(const Part& part, std::uint32_t p) {
  return std::lower_bound(part.pairs.begin(), part.pairs.end(), p) - part.pairs.begin();
}

}  // namespace

std::optional<Mode> population_mode(const DaviesTable& table, const Eigen::VectorXd& energies) {
  const Index levels = energies.size();
  const Part part = part_of(table, energies, populations(levels));
  Eigen::VectorXcd x = Eigen::VectorXcd::Zero(part.map.rows());
  x[place_in(part, pair(1, 1, levels))] = 1;
  x[place_in(part, pair(0, 0, levels))] = -1;
  return leading_mode(part.map, x);
}

std::optional<Mode> coherence_mode(const DaviesTable& table, const Eigen::VectorXd& energies, Index j, Index k) {
  const Index levels = energies.size();
  const Part part = part_of(table, energies, {pair(j, k, levels)});
  Eigen::VectorXcd x = Eigen::VectorXcd::Zero(part.map.rows());
  x[place_in(part, pair(j, k, levels))] = 1;
  return leading_mode(part.map, x);
}

std::optional<Eigen::MatrixXcd> stationary_state(const DaviesTable& table, const Eigen::VectorXd& energies) {
  const Index levels = energies.size();
  const Part part = part_of(table, energies, populations(levels));
  Eigen::MatrixXcd system = part.map;
  const double size = part.map.cwiseAbs().maxCoeff();
  const Index first = place_in(part, pair(0, 0, levels));
  system.row(first).setZero();
  for (Index a = 0; a < levels; ++a) system(first, place_in(part, pair(a, a, levels))) = size;
  Eigen::VectorXcd right = Eigen::VectorXcd::Zero(system.rows());
  right[first] = size;
  const auto found = solve(system, right);
  if (!found) return std::nullopt;
  Eigen::MatrixXcd rho = Eigen::MatrixXcd::Zero(levels, levels);
  for (std::size_t i = 0; i < part.pairs.size(); ++i) rho.data()[part.pairs[i]] = (*found)[static_cast<Index>(i)];
  return 0.5 * (rho + rho.adjoint());
}

}  // namespace tarn::runtime
