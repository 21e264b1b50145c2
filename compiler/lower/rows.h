#pragma once
/// \file Graph nodes into IR values, and the rows under which functions are known.

#include <map>
#include <string>
#include <utility>
#include <vector>

#include "compiler/ir/module.h"
#include "lang/program/graph.h"

namespace tarn::compiler {

/// Where the kinds of input stand in the kernel's input block.
struct Slots {
  std::uint32_t parameters = 0;   ///< Parameter i stands in slot i.
  std::uint32_t offsets_on = 0;
  std::uint32_t readings = 0;     ///< First slot of the readings.
  std::uint32_t observables = 0;  ///< First slot of the observables.
  std::uint32_t under = 0;        ///< First slot of observables under a named equation.
};

/// Copies every node and table of a graph into a module and returns the value of each node. A
/// log-log table becomes exp of a table whose knots and values are logarithms. Values that nothing
/// needs are left for the passes to drop.
std::vector<ir::ValueId> lower_nodes(const Graph& graph, const Slots& slots, ir::Module& module);

/// Rows of one function set; asking twice for the same value gives the same row.
class Rows {
 public:
  Rows(ir::Module& module, std::uint32_t set) : module_(module), set_(set) {}
  std::uint32_t row(ir::ValueId value, const std::string& name);

 private:
  ir::Module& module_;
  std::uint32_t set_;
  std::map<ir::ValueId, std::uint32_t> rows_;
};

}  // namespace tarn::compiler
