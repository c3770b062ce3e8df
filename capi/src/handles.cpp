#include "handles.hpp"

#include "convert.hpp"

namespace tauwright::shell {

const char* word_of(Magic magic) noexcept {
    switch (magic) {
        case Magic::model: return "tauw_model";
        case Magic::record: return "tauw_record";
        case Magic::fit: return "tauw_fit";
        case Magic::synthesis: return "tauw_synthesis";
        case Magic::trend: return "tauw_trend";
        case Magic::sheet: return "tauw_sheet";
        case Magic::differences: return "tauw_differences";
        case Magic::pid_block: return "tauw_pid_block";
        case Magic::process_block: return "tauw_process_block";
        case Magic::audit: return "tauw_audit";
        case Magic::margins: return "tauw_margins";
        case Magic::uncertainty: return "tauw_uncertainty";
        case Magic::discrete: return "tauw_discrete";
        case Magic::valve: return "tauw_valve";
        case Magic::transmitter: return "tauw_transmitter";
        case Magic::released: break;
    }
    return nullptr;
}

void refuse_handle(const char* name, Magic found, Magic expected) {
    const char* word = word_of(found);
    throw Error(error_code::wrong_handle, std::string(name) + " is " +
                                              (word == nullptr ? "no live handle" : std::string("a ") + word) +
                                              "; give a " + word_of(expected) + " that was not destroyed");
}

}  // namespace tauwright::shell

tauw_model::tauw_model(tauwright::TransferFunction process) : value(std::move(process)) {
    const auto lay_out = [](const std::vector<tauwright::QuadraticFactor>& pairs, std::vector<double>& flat) {
        for (const auto& pair : pairs) {
            flat.push_back(pair.time_constant);
            flat.push_back(pair.damping);
        }
    };
    lay_out(value.factors().lead_pairs, lead_pairs);
    lay_out(value.factors().lag_pairs, lag_pairs);
}

tauw_record::tauw_record(tauwright::Record record)
    : value(std::move(record)), good(value.size()),
      output_range(tauwright::shell::from(value.output_range().value_or(tauwright::Range{}))),
      process_value_range(tauwright::shell::from(value.process_value_range().value_or(tauwright::Range{}))) {
    for (std::size_t i = 0; i < good.size(); ++i) good[i] = value.good(i) ? 1 : 0;
}
