#pragma once
/// \file Tables and lists: table(...), column(...), rows(...), list(...).

#include <optional>
#include <string_view>

#include "lang/check/session.h"

namespace tarn {

bool is_table_function(std::string_view name);

/// table: a number at the site's table argument; column and list: a list; rows: rows. In a
/// generic session a table whose file or column is not known is an opaque number.
Value call_table_function(Session& session, const Scope& scope, const ast::Path& path);

/// `table("pace.csv", "t [ns]", "s")` as data: x a time, y a plain number.
std::optional<TableData> read_waveform(Session& session, const Scope& scope, const ast::Path& path);

/// Any item of a list, where the index is not known: an opaque number of the items' dimension.
Value opaque_item(Session& session, const ListValue& list, Span span);

}  // namespace tarn
