#include <algorithm>

#include "catch_compat.hpp"
#include "tauwright/identify/record.hpp"

using namespace tauwright;
using Catch::Matchers::ContainsSubstring;

namespace {

const std::string good_text =
    "# tank farm\n"
    "# output_range: 0 100 %\n"
    "# process_value_range: -20 180 degC\n"
    "time,output,process_value,quality,setpoint,mode\n"
    "2026-03-01T08:00:00Z,40,50.25,good,50,manual\n"
    "2026-03-01T09:00:01.500+01:00,40,Bad Input,bad,50,manual\n"
    "\n"
    "2026-03-01T08:00:03Z,+45,\"50.5\",GOOD,50,automatic\n";

struct BadText {
    const char* what;
    std::string text;
    error_code code;
    const char* says;
};

}  // namespace

TEST_CASE("a record with everything", "[closed form]") {
    const Record r = read_record_text(good_text, "tank.csv");
    REQUIRE(r.size() == 3);
    CHECK(r.time_s()[1] == 1.5);
    CHECK(r.time_s()[2] == 3.0);
    CHECK(r.output()[2] == 45.0);
    CHECK(r.process_value()[2] == 50.5);
    CHECK_FALSE(r.good(1));
    CHECK(r.good_count() == 2);
    CHECK(r.automatic()[2] == 1);
    CHECK(r.process_value_range()->low == -20.0);
    CHECK(r.process_value_range()->unit == "degC");
    CHECK(r.first_stamp() == "2026-03-01T08:00:00Z");
    CHECK(r.source() == "tank.csv");
}

TEST_CASE("line ends, byte-order mark and column order do not matter", "[invariant]") {
    std::string crlf = "\xEF\xBB\xBF";
    for (char ch : good_text) crlf += ch == '\n' ? "\r\n" : std::string(1, ch);
    const Record r = read_record_text(crlf);
    CHECK(r.size() == 3);
    CHECK(r.output_range()->high == 100.0);
    const Record seconds = read_record_text("process_value, OUTPUT ,time_s\n1,2,0\n3,4,0.5\n");
    CHECK(seconds.process_value()[1] == 3.0);
    CHECK(seconds.output()[0] == 2.0);
}

// Source: FIPS 180-4 as Python's hashlib implements it (computed once: hashlib.sha256(b"...").hexdigest()).
TEST_CASE("the hash is that of the bytes", "[independent computation]") {
    CHECK(read_record_text("time_s,output,process_value\n0,1,2\n").sha256() ==
          "e63b2655c4d45b13c0895523573dd0f5f9c54119dfd69070a7e634f2bee74b7f");
}

TEST_CASE("malformed text is refused with line and remedy", "[closed form]") {
    const std::string head = "time,output,process_value\n";
    const std::string row = "2026-03-01T08:00:00Z,1,2\n";
    using enum error_code;
    const std::vector<BadText> cases = {
        {"empty", "", file_malformed, "is empty"},
        {"comment only", "# nothing\n", file_malformed, "is empty"},
        {"header only", head, record_too_short, "no samples"},
        {"binary", std::string("time\0x", 6), file_malformed, "zero byte"},
        {"no output column", "time,process_value\n1,2\n", file_malformed, "no column output"},
        {"semicolons", "time;output;process_value\n1;2;3\n", file_malformed, "separated by ';'"},
        {"column twice", "time_s,output,output,process_value\n", file_malformed, "stands twice"},
        {"both times", "time_s,time,output,process_value\n", file_malformed, "both time_s and time"},
        {"text for a number", head + row + "2026-03-01T08:00:01Z,open,2\n", file_malformed, "line 3: output is 'open'"},
        {"decimal commas", head + "2026-03-01T08:00:00Z,1,5,2,5\n", file_malformed, "decimal commas"},
        {"quoted decimal comma", head + "2026-03-01T08:00:00Z,1,\"2,5\"\n", file_malformed, "decimal comma"},
        {"too few fields", head + "2026-03-01T08:00:00Z,1\n", file_malformed, "2 fields where the header has 3"},
        {"nan", head + "2026-03-01T08:00:00Z,1,nan\n", not_finite, "line 2: process_value is 'nan'"},
        {"infinity", head + "2026-03-01T08:00:00Z,inf,1\n", not_finite, "output is 'inf'"},
        {"too large", head + "2026-03-01T08:00:00Z,1e999,1\n", file_malformed, "beyond what a number can hold"},
        {"equal stamps", head + row + row, time_not_increasing, "line 3"},
        {"backward stamps", head + row + "2026-03-01T07:59:59Z,1,2\n", time_not_increasing, "does not come after"},
        {"stamp without offset", head + row + "2026-03-01T08:00:05,1,2\n", time_zone_missing, "line 3"},
        {"no stamp at all", head + "noon,1,2\n", file_malformed, "RFC 3339"},
        {"impossible date", head + "2026-02-30T08:00:00Z,1,2\n", file_malformed, "RFC 3339"},
        {"impossible offset", head + "2026-02-20T08:00:00+99:00,1,2\n", file_malformed, "RFC 3339"},
        {"quality word", "time_s,output,process_value,quality\n0,1,2,192\n", file_malformed, "write good or bad"},
        {"mode word", "time_s,output,process_value,mode\n0,1,2,cascade\n", file_malformed, "write manual or automatic"},
        {"open quote", head + "\"2026-03-01T08:00:00Z,1,2\n", file_malformed, "not closed"},
        {"text after a quote", head + "\"2026\"x,1,2\n", file_malformed, "follows a closing quote"},
        {"reversed range", "# output_range: 100 0 %\n" + head + row, out_of_domain, "output_range.high is 0"},
        {"range twice", "# output_range: 0 100 %\n# output_range: 0 50 %\n" + head + row, conflicting_arguments, "stands twice"},
        {"range without colon", "# output_range 0 100 %\n" + head + row, file_malformed, "has no colon"},
        {"two signs", head + "2026-03-01T08:00:00Z,+-5,1\n", file_malformed, "output is '+-5'"},
        {"beyond plant history", head + "1700-03-01T08:00:00Z,5,1\n", file_malformed, "RFC 3339"},
        {"range of words", "# output_range: low high\n" + head + row, file_malformed, "where a number belongs"},
    };
    for (const BadText& bad : cases) {
        INFO(bad.what);
        try {
            read_record_text(bad.text, "x.csv");
            FAIL("no error");
        } catch (const Error& e) {
            CHECK(std::string(name_of(e.code())) == name_of(bad.code));
            CHECK_THAT(e.what(), ContainsSubstring(bad.says));
        }
    }
}

TEST_CASE("files that cannot be read", "[closed form]") {
    for (const char* path : {"/nowhere/at/all.csv", "/", ""}) {
        INFO(path);
        try {
            read_record(path);
            FAIL("no error");
        } catch (const Error& e) {
            CHECK(e.code() == error_code::file_not_readable);
        }
    }
}

TEST_CASE("arrays that do not belong together", "[closed form]") {
    const RecordColumns sound{.time_s = {0, 1, 2}, .output = {1, 1, 2}, .process_value = {5, 5, 6}};
    REQUIRE(Record(sound).size() == 3);
    const auto code_of = [&](auto change) {
        RecordColumns c = sound;
        change(c);
        try {
            Record{c};
        } catch (const Error& e) {
            return e.code();
        }
        return error_code::ok;
    };
    const double nan = std::numeric_limits<double>::quiet_NaN(), inf = std::numeric_limits<double>::infinity();
    CHECK(code_of([](auto& c) { c.output.pop_back(); }) == error_code::wrong_length);
    CHECK(code_of([](auto& c) { c.good = {1}; }) == error_code::wrong_length);
    CHECK(code_of([](auto& c) { c.setpoint = {1}; }) == error_code::wrong_length);
    CHECK(code_of([](auto& c) { c.automatic = {1}; }) == error_code::wrong_length);
    CHECK(code_of([](auto& c) { c = {}; }) == error_code::record_too_short);
    CHECK(code_of([&](auto& c) { c.time_s[1] = nan; }) == error_code::not_finite);
    CHECK(code_of([&](auto& c) { c.output[0] = inf; }) == error_code::not_finite);
    CHECK(code_of([&](auto& c) { c.process_value[2] = nan; }) == error_code::not_finite);
    CHECK(code_of([&](auto& c) { c.process_value[2] = nan; c.good = {1, 1, 0}; }) == error_code::ok);
    CHECK(code_of([](auto& c) { c.time_s[1] = 0.0; }) == error_code::time_not_increasing);
    CHECK(code_of([](auto& c) { c.time_s[2] = -3.0; }) == error_code::time_not_increasing);
    CHECK(code_of([](auto& c) { c.output_range = Range{.low = 5, .high = 5}; }) == error_code::out_of_domain);
}
