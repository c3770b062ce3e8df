// Any bytes are a sheet that writes itself again, or an error.
#include <cstdlib>
#include <string_view>

#include "tauwright/tune/tuning_sheet.hpp"

extern "C" int LLVMFuzzerTestOneInput(const unsigned char* data, std::size_t size) {
    using namespace tauwright;
    try {
        const TuningSheet sheet = TuningSheet::from_json({reinterpret_cast<const char*>(data), size});
        if (TuningSheet::from_json(sheet.json()).json() != sheet.json()) std::abort();
        if (sheet.text().empty()) std::abort();
    } catch (const Error& e) {
        if (e.code() == error_code::internal) std::abort();
    }
    return 0;
}
