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
    tauw_margins* margins = nullptr;
    tauw_uncertainty* uncertainty = nullptr;
    tauw_discrete* discrete = nullptr;

    ~Handles() {
        require(tauw_record_destroy(&record) == TAUW_OK && tauw_model_destroy(&model) == TAUW_OK);
        require(tauw_fit_destroy(&fit) == TAUW_OK && tauw_synthesis_destroy(&synthesis) == TAUW_OK);
        require(tauw_trend_destroy(&trend) == TAUW_OK && tauw_sheet_destroy(&sheet) == TAUW_OK);
        require(tauw_margins_destroy(&margins) == TAUW_OK && tauw_uncertainty_destroy(&uncertainty) == TAUW_OK);
        require(tauw_discrete_destroy(&discrete) == TAUW_OK);
    }

    void* any(int which) const {
        void* all[] = {record, model, fit, synthesis, trend, sheet, margins, uncertainty, discrete, nullptr};
        return all[which % 10];
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
    void* it = h.any(in.small(10));
    char text[64];
    double numbers[8];
    std::size_t needed = 0;
    const std::size_t index = in.byte(), capacity = static_cast<std::size_t>(in.small(64));
    tauw_pid_settings settings = in.filled(tauw_pid_settings_defaults);
    tauw_robustness robustness = in.filled(tauw_robustness_defaults);
    tauw_finding finding = in.filled(tauw_finding_defaults);
    tauw_gain_crossover gain_crossover = in.filled(tauw_gain_crossover_defaults);
    tauw_phase_crossover phase_crossover = in.filled(tauw_phase_crossover_defaults);
    tauw_delay_range range = in.filled(tauw_delay_range_defaults);
    tauw_uncertainty_parts parts = in.filled(tauw_uncertainty_parts_defaults);
    tauw_discrete_parts pieces = in.filled(tauw_discrete_parts_defaults);
    tauw_trend_columns columns = in.filled(tauw_trend_columns_defaults);
    tauw_figures figures = in.filled(tauw_figures_defaults);
    std::int32_t status = TAUW_OK;
    // The handle is of the right kind only by chance.
    switch (in.small(23)) {
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
        case 13: status = tauw_margins_summarize(static_cast<tauw_margins*>(it), &robustness, &error); break;
        case 14: status = tauw_margins_gain_crossover(static_cast<tauw_margins*>(it), index, &gain_crossover, &error); break;
        case 15: status = tauw_margins_phase_crossover(static_cast<tauw_margins*>(it), index % 4, &phase_crossover, &error); break;
        case 16: status = tauw_margins_stable_dead_time(static_cast<tauw_margins*>(it), index % 4, &range, &error); break;
        case 17: status = tauw_uncertainty_view(static_cast<tauw_uncertainty*>(it), &parts, &error); break;
        case 18: status = tauw_uncertainty_parameter_name(static_cast<tauw_uncertainty*>(it), index % 4, text, capacity, &needed, &error); break;
        case 19: status = tauw_discrete_view(static_cast<tauw_discrete*>(it), &pieces, &error); break;
        case 20: {
            const double z[2] = {in.number(), in.number()};
            status = tauw_discrete_at(static_cast<tauw_discrete*>(it), z, z + 1, 1, numbers, numbers + 1, &error);
            if (status == TAUW_OK) settle(tauw_discrete_at_frequency(h.discrete, z, 2, numbers, numbers + 2, &error), error, nullptr, false);
            break;
        }
        case 21:
            status = tauw_trend_view(static_cast<tauw_trend*>(it), &columns, &error);
            if (status == TAUW_OK) status = tauw_trend_figures(h.trend, &figures, &error);
            break;
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

void run_field_blocks(Bytes& in, tauw_error& error) {
    const tauw_valve_settings valve_settings = in.filled(tauw_valve_settings_defaults);
    const tauw_transmitter_settings transmitter_settings = in.filled(tauw_transmitter_settings_defaults);
    tauw_valve_coefficients v = in.filled(tauw_valve_coefficients_defaults);
    tauw_transmitter_coefficients t = in.filled(tauw_transmitter_coefficients_defaults);
    const double scan_time = in.number();
    settle(tauw_discretize_valve(&valve_settings, scan_time, in.number(), in.number(), &v, &error), error, nullptr, false);
    settle(tauw_discretize_transmitter(&transmitter_settings, scan_time, in.number(), in.byte(), &t, &error), error, nullptr, false);
    std::vector<double> memory((tauw_valve_size() + tauw_transmitter_size()) / sizeof(double) + 2);
    double* const second = memory.data() + tauw_valve_size() / sizeof(double) + 1;
    tauw_valve* valve = nullptr;
    tauw_transmitter* transmitter = nullptr;
    settle(tauw_valve_init(memory.data(), tauw_valve_size(), &v, in.number(), &valve, &error), error, valve, true);
    settle(tauw_transmitter_init(second, tauw_transmitter_size(), &t, in.number(), &transmitter, &error), error, transmitter, true);
    double x = 0.0;
    for (int scan = 0; scan < 4; ++scan) {
        if (valve != nullptr) {
            settle(tauw_valve_step(valve, in.number(), &x, &error), error, nullptr, false);
            require(x >= v.position_low && x <= v.position_high);
        }
        if (transmitter != nullptr) settle(tauw_transmitter_step(transmitter, in.number(), &x, &error), error, nullptr, false);
    }
}

// What a duty points to; a long scan time keeps trends short.
struct FilledDuty {
    explicit FilledDuty(Bytes& in) : duty(in.filled(tauw_duty_defaults)) {
        valve = in.filled(tauw_valve_settings_defaults);
        transmitter = in.filled(tauw_transmitter_settings_defaults);
        for (double& x : disturbance) x = in.number();
        duty.has_scan_time = 1;
        duty.scan_time = 1.0;
        duty.valve = in.small(2) == 0 ? nullptr : &valve;
        duty.transmitter = in.small(2) == 0 ? nullptr : &transmitter;
        duty.disturbance = disturbance;
        duty.disturbance_count = static_cast<std::size_t>(in.small(4));
    }
    FilledDuty(const FilledDuty&) = delete;

    tauw_duty duty;
    tauw_valve_settings valve;
    tauw_transmitter_settings transmitter;
    double disturbance[3];
};

// Margins of a model as an open loop, with settings or with the exact controller.
void assess(Bytes& in, Handles& h, tauw_error& error) {
    require(tauw_margins_destroy(&h.margins) == TAUW_OK);
    const tauw_pid_settings settings = in.filled(tauw_pid_settings_defaults);
    const tauw_robustness_options options = in.filled(tauw_robustness_options_defaults);
    const tauw_valve_settings valve = in.filled(tauw_valve_settings_defaults);
    tauw_delay_budget budget = in.filled(tauw_delay_budget_defaults);
    tauw_valve_cycle cycle = in.filled(tauw_valve_cycle_defaults);
    std::int32_t status = TAUW_OK;
    switch (in.small(3)) {
        case 0: status = tauw_margins_of(h.model, &settings, &options, &h.margins, &error); break;
        case 1: status = tauw_margins_of_open_loop(h.model, &h.margins, &error); break;
        default: status = tauw_margins_of_exact_controller(h.model, h.synthesis, in.number(), &h.margins, &error); break;
    }
    settle(status, error, h.margins, true);
    settle(tauw_delay_budget_of(h.model, &settings, &options, &budget, &error), error, nullptr, false);
    settle(tauw_valve_cycle_of(h.model, &settings, &valve, &cycle, &error), error, nullptr, false);
}

std::int32_t go_on(double share_done, void* context) {
    require(share_done >= 0.0 && share_done <= 1.0);
    return *static_cast<std::int32_t*>(context);
}

// A set of processes, its worst member and the share that violates limits, in short searches.
void doubt(Bytes& in, Handles& h, tauw_error& error) {
    require(tauw_uncertainty_destroy(&h.uncertainty) == TAUW_OK);
    const tauw_uncertainty_box box = in.filled(tauw_uncertainty_box_defaults);
    const tauw_model* list[2] = {h.model, h.model};
    std::int32_t status = TAUW_OK, answer = in.small(8) == 0 ? in.small(3) : 1;
    switch (in.small(3)) {
        case 0: status = tauw_uncertainty_of_box(&box, &h.uncertainty, &error); break;
        case 1: status = tauw_uncertainty_from_fit(h.fit, in.number(), &h.uncertainty, &error); break;
        default: status = tauw_uncertainty_of_models(list, static_cast<std::size_t>(in.small(3)), &h.uncertainty, &error); break;
    }
    settle(status, error, h.uncertainty, true);
    const tauw_pid_settings settings = in.filled(tauw_pid_settings_defaults);
    const tauw_violation_limits limits = in.filled(tauw_violation_limits_defaults);
    tauw_worst_case_options options = in.filled(tauw_worst_case_options_defaults);
    tauw_violation_options drawing = in.filled(tauw_violation_options_defaults);
    tauw_worst_case worst = in.filled(tauw_worst_case_defaults);
    tauw_violating_share share = in.filled(tauw_violating_share_defaults);
    options.most_boxes = in.byte();
    drawing.members = static_cast<std::size_t>(in.small(20));
    options.progress = drawing.progress = in.small(2) == 0 ? nullptr : go_on;
    options.context = drawing.context = &answer;
    tauw_model* at = nullptr;
    settle(tauw_worst_case_of(h.model, &settings, h.uncertainty, &options, &worst, &at, &error), error, at, true);
    require(tauw_model_destroy(&at) == TAUW_OK);
    status = tauw_violating_share_of(h.model, &settings, h.uncertainty, &limits, &drawing, &share, &error);
    settle(status, error, nullptr, false);
    if (status == TAUW_OK) require(share.share >= 0.0 && share.share <= 1.0);
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
        const FilledDuty filled(in);
        const double horizon = in.byte();
        if (in.small(2) == 0)
            settle(tauw_simulate(h.model, &settings, &filled.duty, horizon, &h.trend, &error), error, h.trend, true);
        else
            settle(tauw_continuous_trend(h.model, &settings, &filled.duty, horizon / 16.0, in.byte(), &h.trend, &error), error, h.trend, true);
    } else if (what == 3) {
        require(tauw_discrete_destroy(&h.discrete) == TAUW_OK);
        const double scan_time = in.number();
        settle(tauw_held(h.model, scan_time, in.small(3), &h.discrete, &error), error, h.discrete, true);
    } else {
        require(tauw_sheet_destroy(&h.sheet) == TAUW_OK);
        tauw_tuning_request request = in.filled(tauw_tuning_request_defaults);
        const FilledDuty filled(in);
        request.form = nullptr;
        request.as_found = nullptr;
        request.identify = nullptr;
        request.duty = in.small(2) == 0 ? nullptr : &filled.duty;
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
        switch (const int what = in.small(14)) {
            case 0: make_model(in, handles, error); break;
            case 1: make_record(in, handles, error); break;
            case 2: convert(in, error); break;
            case 3: run_block(in, error); break;
            case 4: run_field_blocks(in, error); break;
            case 5: assess(in, handles, error); break;
            case 6: doubt(in, handles, error); break;
            case 7:
            case 8:
            case 9:
            case 10:
            case 11: work(in, handles, error, what - 7); break;
            default: look(in, handles, error); break;
        }
    }
    return 0;
}
