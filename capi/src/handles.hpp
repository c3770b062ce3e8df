// Handles: what stands behind the opaque pointers, and the magic word that tells them apart.
#pragma once

#include <cstdint>
#include <cstring>
#include <string>
#include <utility>
#include <vector>

#include "shell.hpp"
#include "tauwright/assess/robustness.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/assess/uncertainty.hpp"
#include "tauwright/discretize/held.hpp"
#include "tauwright/identify/identify.hpp"
#include "tauwright/model/transfer_function.hpp"
#include "tauwright/synthesize/synthesize.hpp"
#include "tauwright/tauwright.h"
#include "tauwright/tune/audit.hpp"
#include "tauwright/tune/tuning_sheet.hpp"

namespace tauwright::shell {

/// First word of everything a handle points to. Values are arbitrary but rare in memory.
enum class Magic : std::uint32_t {
    released = 0xdead7a55u,
    model = 0x7a5e0d01u,
    record = 0x7a5e0d02u,
    fit = 0x7a5e0d03u,
    synthesis = 0x7a5e0d04u,
    trend = 0x7a5e0d05u,
    sheet = 0x7a5e0d06u,
    differences = 0x7a5e0d07u,
    pid_block = 0x7a5e0d08u,
    process_block = 0x7a5e0d09u,
    audit = 0x7a5e0d0au,
    margins = 0x7a5e0d0bu,
    uncertainty = 0x7a5e0d0cu,
    discrete = 0x7a5e0d0du,
    valve = 0x7a5e0d0eu,
    transmitter = 0x7a5e0d0fu,
};

/// The handle type of a magic word, or nullptr.
const char* word_of(Magic magic) noexcept;

/// The first word, read without assuming what the pointer points to.
inline Magic magic_at(const void* handle) noexcept {
    Magic magic;
    std::memcpy(&magic, handle, sizeof magic);
    return magic;
}

}  // namespace tauwright::shell

struct tauw_model {
    static constexpr auto kind = tauwright::shell::Magic::model;
    explicit tauw_model(tauwright::TransferFunction process);

    tauwright::shell::Magic magic = kind;
    tauwright::TransferFunction value;
    std::vector<double> lead_pairs, lag_pairs;  ///< as C lays them out
};

struct tauw_record {
    static constexpr auto kind = tauwright::shell::Magic::record;
    explicit tauw_record(tauwright::Record record);

    tauwright::shell::Magic magic = kind;
    tauwright::Record value;
    std::vector<std::uint8_t> good;
    tauw_range output_range, process_value_range;  ///< as C lays them out; used where the record has them
};

struct tauw_fit {
    static constexpr auto kind = tauwright::shell::Magic::fit;
    explicit tauw_fit(tauwright::FittedModel fit) : value(std::move(fit)) {}

    tauwright::shell::Magic magic = kind;
    tauwright::FittedModel value;
};

struct tauw_synthesis {
    static constexpr auto kind = tauwright::shell::Magic::synthesis;
    explicit tauw_synthesis(tauwright::Synthesis synthesis) : value(std::move(synthesis)) {}

    tauwright::shell::Magic magic = kind;
    tauwright::Synthesis value;
};

struct tauw_trend {
    static constexpr auto kind = tauwright::shell::Magic::trend;
    explicit tauw_trend(tauwright::Trend trend) : value(std::move(trend)) {}

    tauwright::shell::Magic magic = kind;
    tauwright::Trend value;
};

struct tauw_margins {
    static constexpr auto kind = tauwright::shell::Magic::margins;
    explicit tauw_margins(tauwright::Robustness robustness) : value(std::move(robustness)) {}

    tauwright::shell::Magic magic = kind;
    tauwright::Robustness value;
};

struct tauw_uncertainty {
    static constexpr auto kind = tauwright::shell::Magic::uncertainty;
    explicit tauw_uncertainty(tauwright::Uncertainty set) : value(std::move(set)) {}

    tauwright::shell::Magic magic = kind;
    tauwright::Uncertainty value;
};

struct tauw_discrete {
    static constexpr auto kind = tauwright::shell::Magic::discrete;
    explicit tauw_discrete(tauwright::DiscreteTransferFunction process) : value(std::move(process)) {}

    tauwright::shell::Magic magic = kind;
    tauwright::DiscreteTransferFunction value;
};

struct tauw_sheet {
    static constexpr auto kind = tauwright::shell::Magic::sheet;
    explicit tauw_sheet(tauwright::TuningSheet sheet) : value(std::move(sheet)) {}

    tauwright::shell::Magic magic = kind;
    tauwright::TuningSheet value;
};

struct tauw_differences {
    static constexpr auto kind = tauwright::shell::Magic::differences;
    explicit tauw_differences(std::vector<tauwright::SheetDifference> list) : value(std::move(list)) {}

    tauwright::shell::Magic magic = kind;
    std::vector<tauwright::SheetDifference> value;
};

struct tauw_audit {
    static constexpr auto kind = tauwright::shell::Magic::audit;
    tauw_audit(std::vector<tauwright::AuditRow> rows, bool was_cancelled) : value(std::move(rows)), cancelled(was_cancelled) {}

    tauwright::shell::Magic magic = kind;
    std::vector<tauwright::AuditRow> value;
    bool cancelled;
};

namespace tauwright::shell {

[[noreturn]] void refuse_handle(const char* name, Magic found, Magic expected);

/// The object behind a live handle of the right kind.
template <class H>
const H& live(const H* handle, const char* name) {
    if (handle == nullptr) refuse_null(name, std::string("give a ") + word_of(H::kind) + " handle");
    if (const Magic found = magic_at(handle); found != H::kind) refuse_handle(name, found, H::kind);
    return *handle;
}

/// A handle the caller waits for; NULL until the work is done.
template <class H>
class Made {
public:
    Made(H** target, const char* name) : target_(given(target, name)) { target_ = nullptr; }

    template <class... Arguments>
    void give(Arguments&&... arguments) {
        target_ = new H(std::forward<Arguments>(arguments)...);
    }

private:
    H*& target_;
};

/// The body of tauw_<x>_destroy.
template <class H>
std::int32_t destroy(H** handle) noexcept {
    if (handle == nullptr || *handle == nullptr) return TAUW_OK;
    if (magic_at(*handle) != H::kind) return TAUW_ERROR_WRONG_HANDLE;
    // Volatile, so that the mark survives: it lets most uses after release be told.
    const_cast<volatile Magic&>((*handle)->magic) = Magic::released;
    delete *handle;
    *handle = nullptr;
    return TAUW_OK;
}

}  // namespace tauwright::shell
