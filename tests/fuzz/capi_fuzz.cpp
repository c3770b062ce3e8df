// Any sequence of calls with any numbers, also wrong kinds and sizes, is answered by a status of the list:
// never a crash, never `internal`, never a handle together with an error.
#include <tauwright/tauwright.h>

#include <cstddef>
#include <cstdint>
#include <cstdlib>
#include <cstring>
#include <vector>

namespace {

void require(bool condition) {
    if (!condition) std::abort();
}

// Takes the input apart; zeros where it has ended.
class Bytes {
public:
    Bytes(const unsigned char* data, std::size_t size) : data_(data), size_(size) {}

    bool empty() const { return at_ >= size_; }
    std::uint8_t byte() { return empty() ? std::uint8_t{0} : data_[at_++]; }
    std::int32_t small(int below) { return byte() % below; }

    // Plain numbers as a rule, now and then any bits.
    double number() {
        static constexpr double plain[] = {0.0, 1.0, -1.0, 2.0, 0.5, 10.0, 100.0, 1e-3, 3.5, 60.0, 1e9, 1e-9};
        const std::uint8_t kind = byte();
        if (kind < 200) return plain[kind % (sizeof plain / sizeof *plain)] * (1.0 + (kind / 12) * 0.125);
        double any = 0.0;
        unsigned char bits[sizeof any];
        for (unsigned char& b : bits) b = byte();
        std::memcpy(&any, bits, sizeof any);
        return any;
    }

    // A struct of defaults, some of its bytes replaced by the input's; pointers are set afterwards.
    template <class T>
    T filled(std::int32_t (*defaults)(T*, std::uint32_t)) {
        T value;
        require(defaults(&value, sizeof value) == TAUW_OK);
        for (int changes = small(6); changes > 0; --changes) {
            const std::size_t word = byte() % (sizeof value / 8) * 8;
            const double x = number();
            const std::int32_t flags[2] = {small(4), small(4)};
            if (byte() % 2 == 0) std::memcpy(reinterpret_cast<char*>(&value) + word, &x, sizeof x);
            else std::memcpy(reinterpret_cast<char*>(&value) + word, flags, sizeof flags);
        }
        if (byte() % 8 != 0) value.struct_size = sizeof value;
        return value;
    }

private:
    const unsigned char* data_;
    std::size_t size_, at_ = 0;
};

struct Handles {
    tauw_record* record = nullptr;
    tauw_model* model = nullptr;
    tauw_fit* fit = nullptr;
    tauw_synthesis* synthesis = nullptr;
    tauw_trend* trend = nullptr;
    tauw_sheet* sheet = nullptr;

    ~Handles() {
        require(tauw_record_destroy(&record) == TAUW_OK && tauw_model_destroy(&model) == TAUW_OK);
        require(tauw_fit_destroy(&fit) == TAUW_OK && tauw_synthesis_destroy(&synthesis) == TAUW_OK);
        require(tauw_trend_destroy(&trend) == TAUW_OK && tauw_sheet_destroy(&sheet) == TAUW_OK);
    }

    void* any(int which) const {
        void* all[] = {record, model, fit, synthesis, trend, sheet, nullptr};
        return all[which % 7];
    }
};

// A status of the list with a text where it is an error, and no handle beside an error.
void settle(std::int32_t status, const tauw_error& error, const void* made, bool makes) {
    require(status != TAUW_ERROR_INTERNAL);
    require(std::strcmp(tauw_error_name(status), "unknown") != 0);
    require(error.code == status && (status == TAUW_OK) == (error.message[0] == '\0'));
    if (makes && status != TAUW_OK) require(made == nullptr);
}

void make_model(Bytes& in, Handles& h, tauw_error& error) {
    require(tauw_model_destroy(&h.model) == TAUW_OK);
    std::int32_t status = TAUW_OK;
    const double a = in.number(), b = in.number(), c = in.number(), d = in.number();
    switch (in.small(6)) {
        case 0: status = tauw_first_order_plus_dead_time(a, b, c, &h.model, &error); break;
        case 1: status = tauw_second_order_plus_dead_time(a, b, c, d, &h.model, &error); break;
        case 2: status = tauw_integrating_plus_dead_time(a, b, c, &h.model, &error); break;
        case 3: status = tauw_oscillatory_plus_dead_time(a, b, c, d, &h.model, &error); break;
        case 4: {
            const double numerator[2] = {a, b}, denominator[3] = {c, d, in.number()};
            status = tauw_model_from_polynomials(numerator, static_cast<std::size_t>(in.small(3)), denominator,
                                                 static_cast<std::size_t>(in.small(4)), in.number(), &h.model, &error);
            break;
        }
        default: {
            tauw_factors f = in.filled(tauw_factors_defaults);
            const double lists[2] = {a, b};
            f.integrators = in.small(4) - 1;
            f.zeros_at_origin = in.small(3) - 1;
            f.leads = f.lags = f.lead_pairs = f.lag_pairs = lists;
            f.lead_count = static_cast<std::size_t>(in.small(3));
            f.lag_count = static_cast<std::size_t>(in.small(3));
            f.lead_pair_count = static_cast<std::size_t>(in.small(2));
            f.lag_pair_count = static_cast<std::size_t>(in.small(2));
            status = tauw_model_from_factors(&f, &h.model, &error);
        }
    }
    settle(status, error, h.model, true);
}

void make_record(Bytes& in, Handles& h, tauw_error& error) {
    require(tauw_record_destroy(&h.record) == TAUW_OK);
    const std::size_t n = static_cast<std::size_t>(in.small(40));
    std::vector<double> time_s(n), output(n), process_value(n);
    double t = 0.0, u = 40.0, y = 50.0;
    for (std::size_t i = 0; i < n; ++i) {
        time_s[i] = t += 1.0;
        output[i] = in.small(8) == 0 ? u = in.number() : u;
        process_value[i] = y += 0.25 * (u - y) + 0.01 * in.small(3);
    }
    tauw_record_columns c = in.filled(tauw_record_columns_defaults);
    c.n = n;
    c.time_s = time_s.data();
    c.output = output.data();
    c.process_value = process_value.data();
    c.good = c.automatic = nullptr;
    c.setpoint = nullptr;
    tauw_range range = in.filled(tauw_range_defaults);
    c.output_range = in.small(2) == 0 ? nullptr : &range;
    c.process_value_range = in.small(2) == 0 ? nullptr : &range;
    settle(tauw_record_create(&c, &h.record, &error), error, h.record, true);
}

void look(Bytes& in, const Handles& h, tauw_error& error) {
    void* it = h.any(in.small(7));
    char text[64];
    double numbers[8];
    std::size_t needed = 0;
    const std::size_t index = in.byte(), capacity = static_cast<std::size_t>(in.small(64));
    tauw_pid_settings settings = in.filled(tauw_pid_settings_defaults);
    tauw_robustness robustness = in.filled(tauw_robustness_defaults);
    tauw_finding finding = in.filled(tauw_finding_defaults);
    std::int32_t status = TAUW_OK;
    // The handle is of the right kind only by chance.
    switch (in.small(14)) {
        case 0: status = tauw_model_text(static_cast<tauw_model*>(it), text, capacity, &needed, &error); break;
        case 1: status = tauw_fit_lags(static_cast<tauw_fit*>(it), numbers, index % 8, &needed, &error); break;
        case 2: status = tauw_fit_finding(static_cast<tauw_fit*>(it), index, &finding, &error); break;
        case 3: status = tauw_sheet_settings(static_cast<tauw_sheet*>(it), in.small(3), &settings, &error); break;
        case 4: status = tauw_sheet_text(static_cast<tauw_sheet*>(it), nullptr, 0, &needed, &error); break;
        case 5: status = tauw_sheet_json(static_cast<tauw_sheet*>(it), text, capacity, &needed, &error); break;
        case 6: status = tauw_synthesis_settings(static_cast<tauw_synthesis*>(it), &settings, &error); break;
        case 7: status = tauw_synthesis_obstacle_message(static_cast<tauw_synthesis*>(it), index, text, capacity, &needed, &error); break;
        case 8: status = tauw_robustness_of(static_cast<tauw_model*>(it), &settings, nullptr, &robustness, &error); break;
        case 9: status = tauw_robustness_of_open_loop(static_cast<tauw_model*>(it), &robustness, &error); break;
        case 10: status = tauw_record_sha256(static_cast<tauw_record*>(it), text, capacity, nullptr, &error); break;
        case 11: status = tauw_sheet_item(static_cast<tauw_sheet*>(it), in.small(10), text, capacity, &needed, &error); break;
        case 12: {
            const double s[1] = {in.number()}, w[1] = {in.number()};
            status = tauw_synthesis_controller_at(static_cast<tauw_synthesis*>(it), s, w, 1, numbers, numbers + 1, &error);
            break;
        }
        default: {
            tauw_model* alias = static_cast<tauw_model*>(it);
            if (alias != h.model) require(tauw_model_destroy(&alias) == (it == nullptr ? TAUW_OK : TAUW_ERROR_WRONG_HANDLE));
            return;
        }
    }
    settle(status, error, nullptr, false);
}

void convert(Bytes& in, tauw_error& error) {
    tauw_pid_settings settings = in.filled(tauw_pid_settings_defaults);
    tauw_controller_form form = in.filled(tauw_controller_form_defaults);
    tauw_entered entered = in.filled(tauw_entered_defaults);
    tauw_range range = in.filled(tauw_range_defaults);
    form.process_value_range = form.output_range = in.small(2) == 0 ? nullptr : &range;
    settle(tauw_entered_as(&settings, &form, &entered, &error), error, nullptr, false);
    settle(tauw_settings_from(&entered, &form, &settings, &error), error, nullptr, false);
}

void run_block(Bytes& in, tauw_error& error) {
    const tauw_pid_settings settings = in.filled(tauw_pid_settings_defaults);
    tauw_pid_coefficients c = in.filled(tauw_pid_coefficients_defaults);
    settle(tauw_discretize_pid(&settings, in.number(), &c, &error), error, nullptr, false);
    std::vector<double> memory(tauw_pid_block_size() / sizeof(double) + 1);
    tauw_pid_block* block = nullptr;
    const double initial = in.number();
    const std::int32_t status = tauw_pid_block_init(memory.data(), in.small(8) == 0 ? 8 : tauw_pid_block_size(), &c,
                                                    in.number(), in.number(), in.small(2) == 0 ? nullptr : &initial,
                                                    &block, &error);
    settle(status, error, block, true);
    double output = 0.0;
    for (int scan = 0; block != nullptr && scan < 4; ++scan) {
        settle(tauw_pid_block_step(block, in.number(), in.number(), &output, &error), error, nullptr, false);
        if (in.small(4) == 0) settle(tauw_pid_block_to_manual(block, &error), error, nullptr, false);
        if (in.small(4) == 0) settle(tauw_pid_block_to_automatic(block, &error), error, nullptr, false);
        settle(tauw_pid_block_set_manual_output(block, in.number(), &error), error, nullptr, false);
    }
}

void work(Bytes& in, Handles& h, tauw_error& error, int what) {
    if (what == 0) {
        require(tauw_fit_destroy(&h.fit) == TAUW_OK);
        const tauw_identify_options options = in.filled(tauw_identify_options_defaults);
        settle(tauw_identify(h.record, &options, &h.fit, &error), error, h.fit, true);
    } else if (what == 1) {
        require(tauw_synthesis_destroy(&h.synthesis) == TAUW_OK);
        tauw_desired_response desired = in.filled(tauw_desired_response_defaults);
        desired.transfer_function = in.small(3) == 0 ? h.model : nullptr;
        settle(tauw_synthesize(h.model, &desired, &h.synthesis, &error), error, h.synthesis, true);
    } else if (what == 2) {
        require(tauw_trend_destroy(&h.trend) == TAUW_OK);
        const tauw_pid_settings settings = in.filled(tauw_pid_settings_defaults);
        tauw_duty duty = in.filled(tauw_duty_defaults);
        duty.has_scan_time = 1;
        duty.scan_time = 1.0;
        const double horizon = in.byte();
        settle(tauw_simulate(h.model, &settings, &duty, horizon, &h.trend, &error), error, h.trend, true);
    } else {
        require(tauw_sheet_destroy(&h.sheet) == TAUW_OK);
        tauw_tuning_request request = in.filled(tauw_tuning_request_defaults);
        // A long scan time keeps the trends of a sheet short.
        tauw_duty duty = in.filled(tauw_duty_defaults);
        duty.has_scan_time = 1;
        duty.scan_time = 1.0;
        request.form = nullptr;
        request.as_found = nullptr;
        request.identify = nullptr;
        request.duty = in.small(2) == 0 ? nullptr : &duty;
        request.accept_weak_margins_by = in.small(2) == 0 ? nullptr : "fuzz";
        request.loop_name = nullptr;
        settle(tauw_tune(h.record, &request, &h.sheet, &error), error, h.sheet, true);
    }
}

}  // namespace

extern "C" int LLVMFuzzerTestOneInput(const unsigned char* data, std::size_t size) {
    Bytes in(data, size);
    Handles handles;
    tauw_error error;
    require(tauw_error_defaults(&error, sizeof error) == TAUW_OK);
    for (int calls = 0; calls < 40 && !in.empty(); ++calls) {
        switch (const int what = in.small(10)) {
            case 0: make_model(in, handles, error); break;
            case 1: make_record(in, handles, error); break;
            case 2: convert(in, error); break;
            case 3: run_block(in, error); break;
            case 4:
            case 5:
            case 6:
            case 7: work(in, handles, error, what - 4); break;
            default: look(in, handles, error); break;
        }
    }
    return 0;
}
