// What is wrong with a record, before and after the fit.
#pragma once

#include "identify/process_fit.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// The record without the samples that stand on an end of the measuring range; empty where none do.
std::optional<Record> without_clipped(const Record& record, std::vector<Finding>& findings);

/// Findings that need no model.
void look_at_record(const Record& record, const FitData& data, std::vector<Finding>& findings);

/// Findings that compare the record with its fit.
void look_at_fit(const Record& record, const FitData& data, const FitResult& result, const FitOptions& options,
                 const ResidualShape& shape, FittedModel& fit);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
