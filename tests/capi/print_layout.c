/* Prints size and offsets of every struct and the value of every constant of the C interface, to be
 * compared with capi/abi/layout.txt. Fails where a struct has a member that is not listed here: members
 * must follow each other without a gap up to the struct's size. */
#include <stdio.h>

#include <tauwright/tauwright.h>

static size_t next_offset;
static int gaps;

static void member(const char* name, size_t offset, size_t size) {
    printf("  %-44s %4lu %4lu\n", name, (unsigned long)offset, (unsigned long)size);
    if (offset != next_offset) {
        fprintf(stderr, "before %s there is a gap: list the missing member\n", name);
        gaps = 1;
    }
    next_offset = offset + size;
}

static void end_of(const char* name, size_t size) {
    if (next_offset != size) {
        fprintf(stderr, "%s has more at its end than is listed here\n", name);
        gaps = 1;
    }
}

static void constant(const char* name, long value) { printf("  %-52s %4ld\n", name, value); }

#define BEGIN(type)                                                      \
    do {                                                                 \
        typedef type listed;                                             \
        const char* listed_name = #type;                                 \
        next_offset = 0;                                                 \
        printf("struct %s %lu\n", #type, (unsigned long)sizeof(listed))
#define M(name) member(#name, offsetof(listed, name), sizeof(((listed*)0)->name))
#define END                                   \
        end_of(listed_name, sizeof(listed));  \
    } while (0)
#define C(name) constant(#name, (long)name)

static void core(void) {
    printf("enum tauw_error_code\n");
    C(TAUW_OK); C(TAUW_ERROR_NOT_FINITE); C(TAUW_ERROR_OUT_OF_DOMAIN); C(TAUW_ERROR_WRONG_LENGTH);
    C(TAUW_ERROR_CONFLICTING_ARGUMENTS); C(TAUW_ERROR_MISSING_ARGUMENT); C(TAUW_ERROR_MISSING_RANGE);
    C(TAUW_ERROR_UNKNOWN_NAME); C(TAUW_ERROR_UNSUPPORTED_FORM); C(TAUW_ERROR_NULL_POINTER);
    C(TAUW_ERROR_WRONG_STRUCT_SIZE); C(TAUW_ERROR_WRONG_HANDLE); C(TAUW_ERROR_BUFFER_TOO_SMALL);
    C(TAUW_ERROR_FILE_NOT_READABLE); C(TAUW_ERROR_FILE_MALFORMED); C(TAUW_ERROR_TIME_NOT_INCREASING);
    C(TAUW_ERROR_TIME_ZONE_MISSING); C(TAUW_ERROR_RECORD_TOO_SHORT); C(TAUW_ERROR_NO_USABLE_SAMPLE);
    C(TAUW_ERROR_NO_EQUIVALENT); C(TAUW_ERROR_ACTION_WOULD_BE_LOST); C(TAUW_ERROR_OUTSIDE_FIELD_LIMITS);
    C(TAUW_ERROR_SAFETY_FUNCTION); C(TAUW_ERROR_SCHEMA_UNSUPPORTED); C(TAUW_ERROR_OUT_OF_MEMORY);
    C(TAUW_ERROR_INTERNAL);
    BEGIN(tauw_error);
    M(struct_size); M(code); M(message);
    END;
    BEGIN(tauw_range);
    M(struct_size); M(reserved); M(low); M(high); M(unit);
    END;
}

static void model(void) {
    BEGIN(tauw_factors);
    M(struct_size); M(reserved); M(gain); M(dead_time); M(integrators); M(zeros_at_origin); M(leads); M(lead_count);
    M(lags); M(lag_count); M(lead_pairs); M(lead_pair_count); M(lag_pairs); M(lag_pair_count);
    END;
}

static void identify(void) {
    printf("enum tauw_form\n");
    C(TAUW_FORM_AUTOMATIC); C(TAUW_FORM_FIRST_ORDER_PLUS_DEAD_TIME); C(TAUW_FORM_INTEGRATING_PLUS_DEAD_TIME);
    printf("enum tauw_advice\n");
    C(TAUW_ADVICE_TUNE); C(TAUW_ADVICE_TUNE_WITH_CARE); C(TAUW_ADVICE_TEST_AGAIN); C(TAUW_ADVICE_REPAIR_MEASUREMENT);
    C(TAUW_ADVICE_REPAIR_VALVE); C(TAUW_ADVICE_LEAVE_ALONE);
    printf("enum tauw_finding_code\n");
    C(TAUW_FINDING_NO_MOVE); C(TAUW_FINDING_BELOW_NOISE); C(TAUW_FINDING_ENDS_EARLY);
    C(TAUW_FINDING_NOT_STEADY_AT_START); C(TAUW_FINDING_OUTPUT_CLIPPED); C(TAUW_FINDING_BAD_SAMPLES_LEFT_OUT);
    C(TAUW_FINDING_OUTPUT_MOVED_BY_CONTROLLER); C(TAUW_FINDING_GAIN_DIFFERS);
    C(TAUW_FINDING_MODEL_DOES_NOT_FIT);
    BEGIN(tauw_record_columns);
    M(struct_size); M(reserved); M(n); M(time_s); M(output); M(process_value); M(good); M(setpoint); M(automatic);
    M(output_range); M(process_value_range);
    END;
    BEGIN(tauw_identify_options);
    M(struct_size); M(form); M(drift); M(has_fixed_gain); M(has_fixed_slope); M(has_fixed_lag_1);
    M(has_fixed_dead_time); M(has_fixed_offset); M(fixed_gain); M(fixed_slope); M(fixed_lag_1); M(fixed_dead_time);
    M(fixed_offset);
    END;
    BEGIN(tauw_fit_summary);
    M(struct_size); M(form); M(advice); M(has_model); M(gain); M(dead_time); M(first_output); M(offset); M(drift_per_s);
    M(drift_per_s2); M(sum_of_squares); M(residual_rms); M(noise); M(r_squared);
    M(residual_correlation); M(response_to_noise); M(tested_output_low); M(tested_output_high);
    M(tested_process_value_low); M(tested_process_value_high); M(samples_used); M(lag_count);
    M(parameter_count); M(move_count); M(finding_count);
    END;
    BEGIN(tauw_move);
    M(struct_size); M(reserved); M(sample); M(size); M(gain); M(standard_error);
    END;
    BEGIN(tauw_finding);
    M(struct_size); M(code); M(advice); M(reserved); M(value); M(first); M(last);
    END;
}

static void control(void) {
    printf("enum tauw_equation\n");
    C(TAUW_EQUATION_IDEAL); C(TAUW_EQUATION_SERIES); C(TAUW_EQUATION_PARALLEL);
    printf("enum tauw_gain_as\n");
    C(TAUW_GAIN_AS_GAIN); C(TAUW_GAIN_AS_PROPORTIONAL_BAND);
    printf("enum tauw_integral_as\n");
    C(TAUW_INTEGRAL_AS_TIME); C(TAUW_INTEGRAL_AS_REPEATS); C(TAUW_INTEGRAL_AS_GAIN);
    printf("enum tauw_time_unit\n");
    C(TAUW_TIME_UNIT_SECONDS); C(TAUW_TIME_UNIT_MINUTES);
    printf("enum tauw_filter_as\n");
    C(TAUW_FILTER_AS_TIME); C(TAUW_FILTER_AS_RATIO);
    printf("enum tauw_gain_unit\n");
    C(TAUW_GAIN_UNIT_PERCENT); C(TAUW_GAIN_UNIT_ENGINEERING);
    printf("enum tauw_acts_on\n");
    C(TAUW_ACTS_ON_ERROR); C(TAUW_ACTS_ON_PROCESS_VALUE);
    printf("enum tauw_action_as\n");
    C(TAUW_ACTION_AS_SWITCH); C(TAUW_ACTION_AS_SIGN);
    printf("enum tauw_action\n");
    C(TAUW_ACTION_REVERSE); C(TAUW_ACTION_DIRECT);
    BEGIN(tauw_pid_settings);
    M(struct_size); M(has_integral_time); M(gain); M(integral_time); M(derivative_time); M(filter_time);
    M(measurement_filter_time); M(setpoint_weight); M(has_integral_gain); M(reserved); M(integral_gain);
    END;
    BEGIN(tauw_controller_form);
    M(struct_size); M(equation); M(gain_as); M(gain_unit); M(integral_as); M(integral_unit); M(derivative_unit);
    M(filter_as); M(proportional_on); M(derivative_on); M(action_as); M(has_fixed_filter); M(fixed_filter);
    M(integral_off); M(process_value_range); M(output_range); M(has_gain_low); M(has_gain_high); M(has_integral_low);
    M(has_integral_high); M(has_derivative_low); M(has_derivative_high); M(has_filter_low); M(has_filter_high);
    M(gain_low); M(gain_high); M(integral_low); M(integral_high); M(derivative_low); M(derivative_high);
    M(filter_low); M(filter_high); M(gain_resolution); M(integral_resolution); M(derivative_resolution);
    M(filter_resolution);
    END;
    BEGIN(tauw_entered);
    M(struct_size); M(action); M(has_gain); M(has_proportional_band); M(has_integral_time); M(has_repeats);
    M(has_integral_gain); M(has_derivative_time); M(has_derivative_gain); M(has_filter_time); M(has_filter_ratio);
    M(reserved); M(gain); M(proportional_band); M(integral_time); M(repeats); M(integral_gain); M(derivative_time);
    M(derivative_gain); M(filter_time); M(filter_ratio); M(measurement_filter_time); M(setpoint_weight);
    END;
}

static void run(void) {
    printf("enum tauw_mode\n");
    C(TAUW_MODE_MANUAL); C(TAUW_MODE_AUTOMATIC);
    printf("enum tauw_pid_flag\n");
    C(TAUW_FLAG_BAD_INPUT); C(TAUW_FLAG_LIMITED_LOW); C(TAUW_FLAG_LIMITED_HIGH); C(TAUW_FLAG_MANUAL);
    BEGIN(tauw_pid_coefficients);
    M(struct_size); M(reserved); M(gain); M(setpoint_weight); M(integral_per_scan); M(derivative_per_scan);
    M(derivative_smoothing); M(measurement_smoothing); M(tracking_per_scan); M(output_change_per_scan);
    END;
    BEGIN(tauw_process_coefficients);
    M(struct_size); M(reserved); M(growth); M(now); M(before); M(outputs); M(direct); M(delay_scans);
    END;
    BEGIN(tauw_valve_coefficients);
    M(struct_size); M(reserved); M(dead_band); M(stick); M(resolution); M(travel_per_scan); M(position_low);
    M(position_high);
    END;
    BEGIN(tauw_transmitter_coefficients);
    M(struct_size); M(reserved); M(smoothing); M(noise); M(resolution); M(seed);
    END;
}

static void discretize(void) {
    printf("enum tauw_between\n");
    C(TAUW_BETWEEN_CONSTANT); C(TAUW_BETWEEN_LINEAR);
    BEGIN(tauw_discrete_parts);
    M(struct_size); M(between); M(scan_time); M(order); M(delay_scans); M(steady_gain); M(leading); M(factored_error);
    M(direct_now); M(direct_before); M(growth); M(now); M(before); M(ahead); M(outputs); M(pole_offsets);
    M(pole_count); M(zero_offsets); M(zero_count);
    END;
    BEGIN(tauw_valve_settings);
    M(struct_size); M(has_travel_rate_per_s); M(dead_band); M(stick); M(resolution); M(travel_rate_per_s);
    END;
    BEGIN(tauw_transmitter_settings);
    M(struct_size); M(reserved); M(lag); M(resolution);
    END;
}

static void assess(void) {
    printf("enum tauw_verdict\n");
    C(TAUW_VERDICT_STABLE); C(TAUW_VERDICT_UNSTABLE); C(TAUW_VERDICT_MARGINAL); C(TAUW_VERDICT_UNDETERMINED);
    BEGIN(tauw_robustness_options);
    M(struct_size); M(has_scan_time); M(scan_time); M(extra_delay);
    END;
    BEGIN(tauw_robustness);
    M(struct_size); M(verdict); M(has_stable); M(stable); M(has_unstable_poles); M(unstable_poles);
    M(has_gain_margin); M(has_gain_reduction_margin); M(has_phase_margin_deg); M(has_delay_margin);
    M(has_max_sensitivity); M(has_max_sensitivity_frequency); M(has_max_complementary_sensitivity);
    M(has_max_complementary_sensitivity_frequency); M(gain_margin); M(gain_reduction_margin); M(phase_margin_deg);
    M(delay_margin); M(max_sensitivity); M(max_sensitivity_frequency); M(max_complementary_sensitivity);
    M(max_complementary_sensitivity_frequency); M(has_sensitivity_bandwidth); M(has_complementary_bandwidth);
    M(has_delay_reduction_margin); M(fragile); M(phase_crossovers_capped); M(reserved); M(sensitivity_bandwidth);
    M(complementary_bandwidth); M(delay_reduction_margin); M(gain_crossover_count); M(phase_crossover_count);
    M(stable_dead_time_count);
    END;
    BEGIN(tauw_duty);
    M(struct_size); M(has_scan_time); M(scan_time); M(setpoint_step); M(load_step); M(load_time); M(noise);
    M(seed); M(output_low); M(output_high); M(has_rest_output); M(has_rest_process_value); M(rest_output);
    M(rest_process_value); M(setpoint_ramp_time); M(load_ramp_time); M(has_output_rate_limit); M(reserved);
    M(output_rate_limit); M(valve); M(transmitter); M(disturbance); M(disturbance_count);
    END;
    BEGIN(tauw_figures);
    M(struct_size); M(has_overshoot_percent); M(has_settling_time); M(has_peak_load_error); M(overshoot_percent);
    M(settling_time); M(peak_load_error); M(integrated_absolute_error); M(valve_travel);
    M(has_rise_time); M(has_decay_ratio); M(has_peak_load_error_time); M(reserved); M(rise_time); M(decay_ratio);
    M(peak_load_error_time); M(integrated_squared_error); M(integrated_time_absolute_error); M(integrated_error);
    M(time_at_limits); M(reversals);
    END;
    BEGIN(tauw_trend_columns);
    M(struct_size); M(limited); M(n); M(time_s); M(setpoint); M(process_value); M(output); M(measured);
    M(valve_position); M(load); M(ran_away); M(reserved);
    END;
    printf("enum tauw_cycle_existence\n");
    C(TAUW_CYCLE_NONE); C(TAUW_CYCLE_PERSISTS); C(TAUW_CYCLE_UNDETERMINED);
    BEGIN(tauw_valve_cycle);
    M(struct_size); M(existence); M(has_period); M(has_process_value_amplitude); M(has_output_amplitude);
    M(retuning_cures); M(period); M(process_value_amplitude); M(output_amplitude); M(reason);
    END;
}

static void margins(void) {
    BEGIN(tauw_gain_crossover);
    M(struct_size); M(touches); M(frequency_rad_s); M(phase_margin_deg); M(delay_margin); M(error_bound);
    END;
    BEGIN(tauw_phase_crossover);
    M(struct_size); M(touches); M(frequency_rad_s); M(gain_factor); M(error_bound);
    END;
    BEGIN(tauw_delay_range);
    M(struct_size); M(reserved); M(low); M(high);
    END;
    BEGIN(tauw_delay_budget);
    M(struct_size); M(reserved); M(process_dead_time); M(half_scan); M(extra_delay); M(measurement_filter_time);
    M(total); M(working_gain);
    END;
    printf("enum tauw_uncertainty_kind\n");
    C(TAUW_UNCERTAINTY_BOX); C(TAUW_UNCERTAINTY_CONFIDENCE_REGION); C(TAUW_UNCERTAINTY_MODELS);
    BEGIN(tauw_uncertainty_box);
    M(struct_size); M(absolute); M(gain); M(lags); M(leads); M(damping); M(dead_time);
    END;
    BEGIN(tauw_uncertainty_parts);
    M(struct_size); M(kind); M(confidence); M(model_count); M(parameter_count); M(estimates); M(half_axes);
    END;
    BEGIN(tauw_worst_case_options);
    M(struct_size); M(reserved); M(extra_delay); M(tolerance); M(most_boxes); M(progress); M(context);
    END;
    BEGIN(tauw_worst_case);
    M(struct_size); M(verdict); M(certified); M(cancelled); M(has_max_sensitivity); M(has_max_sensitivity_bound);
    M(has_gain_margin); M(has_gain_margin_bound); M(has_phase_margin_deg); M(has_phase_margin_deg_bound);
    M(has_delay_margin); M(has_delay_margin_bound); M(has_at_model); M(reserved); M(max_sensitivity);
    M(max_sensitivity_bound); M(gain_margin); M(gain_margin_bound); M(phase_margin_deg); M(phase_margin_deg_bound);
    M(delay_margin); M(delay_margin_bound); M(at_model); M(members_tried); M(boxes_used);
    END;
    BEGIN(tauw_violation_limits);
    M(struct_size); M(has_max_sensitivity); M(has_gain_margin); M(has_phase_margin_deg); M(max_sensitivity);
    M(gain_margin); M(phase_margin_deg);
    END;
    BEGIN(tauw_violation_options);
    M(struct_size); M(reserved); M(members); M(seed); M(extra_delay); M(progress); M(context);
    END;
    BEGIN(tauw_violating_share);
    M(struct_size); M(cancelled); M(share); M(standard_error); M(members); M(unstable);
    END;
}

static void synthesize(void) {
    printf("enum tauw_obstacle_code\n");
    C(TAUW_OBSTACLE_INFINITE_CONTROLLER); C(TAUW_OBSTACLE_NO_INTEGRAL_ACTION); C(TAUW_OBSTACLE_PREDICTION_NEEDED);
    C(TAUW_OBSTACLE_FASTER_THAN_DEAD_TIME); C(TAUW_OBSTACLE_IMPROPER);
    C(TAUW_OBSTACLE_RIGHT_HALF_PLANE_ZERO_CANCELLED); C(TAUW_OBSTACLE_UNSTABLE_POLE_CANCELLED);
    C(TAUW_OBSTACLE_SLOW_POLE_CANCELLED); C(TAUW_OBSTACLE_NEGATIVE_TIME);
    printf("enum tauw_severity\n");
    C(TAUW_SEVERITY_CAUTION); C(TAUW_SEVERITY_NEEDS_FILTER); C(TAUW_SEVERITY_IMPOSSIBLE);
    BEGIN(tauw_desired_response);
    M(struct_size); M(has_time_constant); M(time_constant); M(order); M(reserved); M(transfer_function);
    END;
    BEGIN(tauw_obstacle);
    M(struct_size); M(code); M(severity); M(reserved); M(value);
    END;
    BEGIN(tauw_synthesis_summary);
    M(struct_size); M(buildable); M(pid_expressible); M(has_controller); M(has_settings); M(controller_integrators);
    M(obstacle_count);
    END;
}

static void audit(void) {
    printf("enum tauw_audit_outcome\n");
    C(TAUW_AUDIT_FAILED); C(TAUW_AUDIT_UNSTABLE_IN_SERVICE); C(TAUW_AUDIT_WEAK_IN_SERVICE); C(TAUW_AUDIT_PROPOSAL_BETTER);
    C(TAUW_AUDIT_NO_CASE); C(TAUW_AUDIT_TRADE_OFF); C(TAUW_AUDIT_PROPOSAL_WORSE); C(TAUW_AUDIT_NO_PROPOSAL);
    C(TAUW_AUDIT_UNDETERMINED);
    printf("enum tauw_audit_side\n");
    C(TAUW_AUDIT_IN_SERVICE); C(TAUW_AUDIT_PROPOSAL);
    printf("enum tauw_audit_item\n");
    C(TAUW_AUDIT_NAME); C(TAUW_AUDIT_REASON); C(TAUW_AUDIT_ERROR); C(TAUW_AUDIT_TEXT);
    BEGIN(tauw_audit_loop);
    M(struct_size); M(process_gain_unit); M(name); M(process); M(settings); M(entered); M(form); M(proposal); M(duty);
    M(horizon); M(has_horizon); M(reserved);
    END;
    BEGIN(tauw_audit_options);
    M(struct_size); M(threads); M(progress); M(context);
    END;
    BEGIN(tauw_audit_row);
    M(struct_size); M(outcome); M(code); M(change_worthwhile); M(proposal_made); M(has_in_service);
    M(has_in_service_entered); M(has_in_service_figures); M(has_proposal); M(has_proposal_entered);
    M(has_proposal_figures); M(reserved); M(horizon);
    END;
    BEGIN(tauw_audit_summary);
    M(struct_size); M(cancelled); M(rows); M(failed); M(unstable_in_service); M(weak_in_service); M(changes_worthwhile);
    END;
}

static void tune(void) {
    printf("enum tauw_sheet_controller\n");
    C(TAUW_SHEET_AS_FOUND); C(TAUW_SHEET_PROPOSED);
    printf("enum tauw_sheet_item\n");
    C(TAUW_SHEET_LIBRARY_VERSION); C(TAUW_SHEET_LOOP_NAME); C(TAUW_SHEET_SOURCE); C(TAUW_SHEET_FIRST_STAMP);
    C(TAUW_SHEET_INPUT_SHA256); C(TAUW_SHEET_GAIN_UNIT); C(TAUW_SHEET_SPEED_REASON);
    C(TAUW_SHEET_WEAK_MARGINS_ACCEPTED_BY);
    BEGIN(tauw_tuning_request);
    M(struct_size); M(has_time_constant); M(time_constant); M(form); M(duty); M(as_found); M(identify);
    M(safety_function); M(reserved); M(accept_weak_margins_by); M(loop_name);
    END;
    BEGIN(tauw_sheet_summary);
    M(struct_size); M(advice); M(has_model); M(has_speed); M(has_as_found); M(has_as_found_entered);
    M(has_as_found_figures); M(has_proposed); M(has_proposed_entered); M(has_proposed_figures); M(time_constant);
    M(effective_dead_time); M(half_scan); M(measurement_filter_time); M(finding_count); M(obstacle_count);
    M(withheld_count); M(caution_count);
    END;
}

int main(void) {
    core();
    model();
    identify();
    control();
    run();
    discretize();
    assess();
    margins();
    synthesize();
    tune();
    audit();
    return gaps;
}
