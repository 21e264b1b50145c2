#include "runtime/generator/noise_table.h"

#include <algorithm>
#include <type_traits>

#include "lang/support/check.h"
#include "runtime/levels/product.h"

namespace tarn::runtime {
namespace {

using Index = Eigen::Index;

constexpr std::size_t kMostValues = std::size_t{150} << 20U;  ///< 1.2 GiB.
constexpr Index kMostSplit = 16;
constexpr double kInside = 1e-12;

/// Couplings that stay the same along s, in the basis of the model; nothing where one does not.
template <class Scalar>
std::optional<std::vector<Eigen::MatrixXcd>> constant_couplings(const LevelModel<Scalar>& model, double s_min, double s_max) {
  const Matrix<Scalar> unit = Matrix<Scalar>::Identity(model.dimension, model.dimension);
  std::vector<Eigen::MatrixXcd> found;
  for (std::size_t c = 0; c < model.couplings; ++c) {
    const Matrix<Scalar> first = model.coupling(c, s_min, unit);
    for (const double x : {0.17, 0.39, 0.5, 0.71, 0.93, 1.0}) {
      if (model.coupling(c, s_min + x * (s_max - s_min), unit) != first) return std::nullopt;
    }
    found.push_back(first.template cast<std::complex<double>>());
  }
  return found;
}

/// Ends of panels along s.
std::vector<double> breaks_along_s(const std::vector<double>& breaks, const NoiseTableOptions& options) {
  std::vector<double> edges = {options.s_min};
  for (const double s : breaks) {
    if (s > edges.back() + kInside && s < options.s_max - kInside) edges.push_back(s);
  }
  edges.push_back(std::max(options.s_max, options.s_min + kInside));
  return edges;
}

/// Along t.
std::vector<double> breaks_along_t(const NoiseTableOptions& options) {
  std::vector<double> edges(options.breaks.begin(), options.breaks.end());
  for (const Segment& segment : options.along->segments) edges.push_back(segment.t1);
  edges.push_back(0);
  std::sort(edges.begin(), edges.end());
  const double close = 1e-12 * options.along->duration();
  edges.erase(std::unique(edges.begin(), edges.end(), [&](double a, double b) { return b - a < close; }), edges.end());
  edges.back() = options.along->duration();
  return edges;
}

double s_of(const Timeline& timeline, double t) {
  for (const Segment& segment : timeline.segments) {
    if (t <= segment.t1) return segment.s0 + (segment.s1 - segment.s0) * (t - segment.t0) / (segment.t1 - segment.t0);
  }
  return timeline.last_s;
}

/// Index of the pair (i, j), i <= j.
std::size_t pair_of(Index i, Index j) { return static_cast<std::size_t>(j * (j + 1) / 2 + i); }
/// Of i < j.
std::size_t proper_pair_of(Index i, Index j) { return static_cast<std::size_t>(j * (j - 1) / 2 + i); }

/// The maps of Re rho and Im rho of sum_q 2 left_q rho left_q^T; columns stand one after the other.
void write_split(const OperatorForm& form, const NoiseLayout& layout, double* out) {
  const Index n = layout.dimension, square = n * n;
  Eigen::MatrixXd jumps(square, static_cast<Index>(form.left.size()));
  for (std::size_t q = 0; q < form.left.size(); ++q) {
    jumps.col(static_cast<Index>(q)) = std::sqrt(2.0) * form.left[q].real().reshaped();
  }
  // all(i + n k, j + n l) = sum_q B_q(i, k) B_q(j, l).
  const Eigen::MatrixXd all = product<double>(jumps, jumps.transpose());
  double* symmetric = out + layout.symmetric();
  double* antisymmetric = out + layout.antisymmetric();
  const std::size_t pairs = layout.pairs(), proper = layout.proper_pairs();
  for (Index l = 0; l < n; ++l) {
    for (Index k = 0; k <= l; ++k) {
      double* even = symmetric + pair_of(k, l) * pairs;
      double* odd = k < l ? antisymmetric + proper_pair_of(k, l) * proper : nullptr;
      for (Index j = 0; j < n; ++j) {
        for (Index i = 0; i <= j; ++i) {
          const double direct = all(i + n * k, j + n * l), crossed = all(i + n * l, j + n * k);
          even[pair_of(i, j)] = k < l ? direct + crossed : direct;
          if (k < l && i < j) odd[proper_pair_of(i, j)] = direct - crossed;
        }
      }
    }
  }
}

void write_form(const OperatorForm& form, const NoiseLayout& layout, double* out) {
  const auto put = [](const Eigen::MatrixXcd& matrix, double* to) {
    std::copy_n(reinterpret_cast<const double*>(matrix.data()), 2 * matrix.size(), to);
  };
  put(form.drift, out + layout.drift());
  if (layout.split) return write_split(form, layout, out);
  for (std::size_t j = 0; j < layout.terms; ++j) {
    if (layout.real_left) {
      Eigen::Map<Eigen::MatrixXd>(out + layout.left() + j * layout.square(), layout.dimension, layout.dimension) =
          form.left[j].real();
    } else {
      put(form.left[j], out + layout.left() + 2 * j * layout.square());
    }
    if (layout.right_along) put(form.right[j], out + layout.right() + 2 * j * layout.square());
  }
}

}  // namespace

std::size_t NoiseLayout::size() const {
  if (split) return antisymmetric() + proper_pairs() * proper_pairs();
  return right() + (right_along ? 2 * terms * square() : 0);
}

template <class Scalar>
std::shared_ptr<const NoiseTable> NoiseTable::make(const LevelModel<Scalar>& model, std::vector<FastBath> baths,
                                                   const NoiseTableOptions& options) {
  const bool redfield = options.equation == FastEquation::redfield;
  const Index levels = options.levels > 0 ? std::min(options.levels, model.dimension) : model.dimension;
  const auto form_at = [&](double at) {
    const Frame<Scalar> frame = model.solve(options.along ? s_of(*options.along, at) : at, levels);
    return redfield ? redfield_form<Scalar>(model, frame, baths, options.shift, at)
                    : lindblad_form<Scalar>(model, frame, baths, options.shift);
  };
  auto made = std::make_shared<NoiseTable>();
  for (const FastBath& bath : baths) {
    if (bath.pair) made->bath_error_ += bath.pair->rate.error() + (options.shift ? bath.pair->shift.error() : 0.0);
  }
  NoiseLayout& layout = made->layout_;
  layout.dimension = model.dimension;
  made->along_time_ = options.along != nullptr;
  layout.terms = form_at(options.along ? 0 : options.s_min).left.size();
  layout.own_right = redfield;
  layout.real_left = !redfield && std::is_same_v<Scalar, double>;
  layout.split = !options.keep_operators && layout.real_left && layout.terms > 2 * model.couplings && model.dimension <= kMostSplit;
  if (redfield) {
    auto constant = levels == model.dimension ? constant_couplings(model, options.s_min, options.s_max) : std::nullopt;
    layout.right_along = !constant;
    if (constant) made->fixed_right_ = std::move(*constant);
  }
  SmoothTable::Options table;
  table.size = layout.size();
  table.breaks = options.along ? breaks_along_t(options) : breaks_along_s(model.breaks, options);
  table.tolerance = options.tolerance;
  table.most_values = kMostValues;
  table.interrupted = options.interrupted;
  made->table_ = SmoothTable::make([&](double s, double* out) { write_form(form_at(s), layout, out); }, table);
  if (!made->table_) return nullptr;
  return made;
}

template std::shared_ptr<const NoiseTable> NoiseTable::make<double>(const LevelModel<double>&, std::vector<FastBath>, const NoiseTableOptions&);
template std::shared_ptr<const NoiseTable> NoiseTable::make<std::complex<double>>(const LevelModel<std::complex<double>>&, std::vector<FastBath>, const NoiseTableOptions&);

}  // namespace tarn::runtime
