// Any bytes are a record, or an error that names the place; never a crash, never a NaN let through.
#include <cstdlib>
#include <string_view>

#include "tauwright/identify/identify.hpp"

extern "C" int LLVMFuzzerTestOneInput(const unsigned char* data, std::size_t size) {
    using namespace tauwright;
    try {
        const Record record = read_record_text({reinterpret_cast<const char*>(data), size}, "fuzz");
        for (std::size_t i = 0; i < record.size(); ++i) {
            if (!is_finite(record.time_s()[i]) || !is_finite(record.output()[i])) std::abort();
            if (record.good(i) && !is_finite(record.process_value()[i])) std::abort();
            if (i > 0 && !(record.time_s()[i - 1] < record.time_s()[i])) std::abort();
        }
        const FittedModel fit = identify(record);
        if (!is_finite(fit.sum_of_squares) && fit.model && fit.advice() <= Advice::tune_with_care) std::abort();
    } catch (const Error& e) {
        if (e.code() == error_code::internal || std::string_view(e.what()).empty()) std::abort();
    }
    return 0;
}
