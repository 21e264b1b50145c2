#include "runtime/kernel/input_block.h"

#include "lang/support/check.h"

namespace tarn::runtime {

InputBlock::InputBlock(const Kernel& kernel, std::span<const TableNumbers> tables)
    : lanes_(kernel.lanes()), inputs_(std::size_t{kernel.inputs()} * kernel.lanes(), 0.0) {
  TARN_CHECK(tables.size() == kernel.tables());
  for (const TableNumbers& table : tables) {
    TARN_CHECK(table.knots.size() >= 2);
    std::vector<double> packed = table.knots;
    for (const auto& column : table.c) {
      TARN_CHECK(column.size() + 1 == table.knots.size());
      packed.insert(packed.end(), column.begin(), column.end());
    }
    tables_.push_back(std::move(packed));
  }
  for (const auto& table : tables_) pointers_.push_back(table.data());
  view_ = {inputs_.data(), pointers_.data()};
}

void InputBlock::set(std::uint32_t input, double value) {
  for (std::uint32_t lane = 0; lane < lanes_; ++lane) set(input, lane, value);
}

void InputBlock::set(std::uint32_t input, std::uint32_t lane, double value) {
  const std::size_t place = std::size_t{input} * lanes_ + lane;
  TARN_CHECK(lane < lanes_ && place < inputs_.size());
  inputs_[place] = value;
}

void InputBlock::set_all(std::span<const double> values) {
  TARN_CHECK(values.size() * lanes_ == inputs_.size());
  for (std::uint32_t input = 0; input < values.size(); ++input) set(input, values[input]);
}

double InputBlock::get(std::uint32_t input, std::uint32_t lane) const {
  const std::size_t place = std::size_t{input} * lanes_ + lane;
  TARN_CHECK(lane < lanes_ && place < inputs_.size());
  return inputs_[place];
}

}  // namespace tarn::runtime
