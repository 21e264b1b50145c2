#pragma once
/// \file Rooted trees and the order conditions of Runge-Kutta methods.
/// Source: Solving Ordinary Differential Equations I (Springer, 1993), II.2: a method has order p
/// if sum_i b_i u_i(tree) = 1 / density(tree) for every rooted tree of at most p vertices.

#include <cstddef>
#include <vector>

namespace tarn::test {

struct Tree {
  std::size_t order = 1;
  double density = 1;
  std::vector<std::size_t> branches;  ///< Rows of the list, ascending.
};

/// All rooted trees of up to `most` vertices, by order. Their numbers are 1, 1, 2, 4, 9, 20, 48, 115.
inline std::vector<Tree> rooted_trees(std::size_t most) {
  std::vector<Tree> trees = {{}};
  // Extends `branches` by trees that are no earlier in the list until `left` vertices are used.
  const auto grow = [&](auto&& self, std::vector<std::size_t>& branches, std::size_t from,
                        std::size_t left, std::vector<Tree>& out) -> void {
    if (left == 0) {
      Tree tree;
      tree.branches = branches;
      for (const std::size_t b : branches) {
        tree.order += trees[b].order;
        tree.density *= trees[b].density;
      }
      tree.density *= static_cast<double>(tree.order);
      out.push_back(tree);
      return;
    }
    for (std::size_t next = from; next < trees.size(); ++next) {
      if (trees[next].order > left) continue;
      branches.push_back(next);
      self(self, branches, next, left - trees[next].order, out);
      branches.pop_back();
    }
  };
  for (std::size_t order = 2; order <= most; ++order) {
    std::vector<Tree> found;
    std::vector<std::size_t> branches;
    grow(grow, branches, 0, order - 1, found);
    trees.insert(trees.end(), found.begin(), found.end());
  }
  return trees;
}

/// u_i(tree) of every stage for every tree, u[tree][stage].
template <class Matrix>
std::vector<std::vector<double>> elementary_weights(const std::vector<Tree>& trees, const Matrix& a,
                                                    std::size_t stages) {
  std::vector<std::vector<double>> u;
  for (const Tree& tree : trees) {
    std::vector<double> weights(stages, 1.0);
    for (const std::size_t b : tree.branches)
      for (std::size_t i = 0; i < stages; ++i) {
        double sum = 0;
        for (std::size_t j = 0; j < stages; ++j) sum += a[i][j] * u[b][j];
        weights[i] *= sum;
      }
    u.push_back(weights);
  }
  return u;
}

}  // namespace tarn::test
