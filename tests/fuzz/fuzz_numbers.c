// The number grammar, lists from:to:step, densities, units, and writing numbers. Each line of the
// input is one text.
#include "fuzz.h"
#include "tacet/pattern.h"

#define MOST_VALUES 300

static const char *digits(const char *at)
{
    return at + strspn(at, "0123456789");
}

// The grammar once more, from its definition: [+-]digits[.digits][e[+-]digits], also .digits.
static bool is_number(const char *text)
{
    const char *at = text + strspn(text, "+-"), *whole = digits(at), *end = whole;
    if (at - text > 1) return false;
    if (*end == '.') end = digits(end + 1);
    if (end - at - (*whole == '.') < 1) return false;
    if (*end == 'e' || *end == 'E') {
        const char *power = end + 1;
        if (*power == '+' || *power == '-') power++;
        if (digits(power) == power) return false;
        end = digits(power);
    }
    return !*end;
}

// Written and read again it is the same number, bit for bit.
static void check_format(double value)
{
    char text[TACET_NUMBER_TEXT];
    double back = 0;
    REQUIRE(tacet_number_format(value, text) == text && strlen(text) < sizeof text);
    REQUIRE(tacet_number_parse(text, &back));
    REQUIRE(back == value);
    for (int figures = 1; figures <= 17; figures += 4) {
        tacet_number_format_short(value, figures, text);
        REQUIRE(memchr(text, '\0', sizeof text));
        double half_of_last = 0.5001 * pow(10, 1 - figures) + 1e-15;
        if (!tacet_number_parse(text, &back))
            REQUIRE(fabs(value) > 1e308); // rounded up past the largest number
        else
            REQUIRE(fabs(back / 2 - value / 2) <= half_of_last * fabs(value / 2) ||
                    fabs(value) < 1e-300);
    }
}

static void check_number(const char *text)
{
    double value = -7;
    if (!tacet_number_parse(text, &value)) {
        REQUIRE(value == -7);
        REQUIRE(!is_number(text) || strlen(text) > 400 || isinf(strtod(text, NULL)));
        return;
    }
    REQUIRE(is_number(text));
    REQUIRE(isfinite(value));
    REQUIRE(value == strtod(text, NULL));
    check_format(value);
}

static void check_list(const char *text, tacet_arena *a)
{
    double *value = NULL, *again = NULL;
    size_t n = 0, m = 0;
    tacet_error e = {.text = ""};
    tacet_status status = tacet_list_parse(text, MOST_VALUES, a, &value, &n, &e);
    if (status != TACET_OK) {
        fuzz_refusal(status, &e);
        REQUIRE(e.column >= 1 && (size_t)e.column <= strlen(text) + 1);
        return;
    }
    REQUIRE(n >= 1 && n <= MOST_VALUES);
    char *out = malloc(n * (TACET_NUMBER_TEXT + 2)), *end = out;
    REQUIRE(out);
    for (size_t i = 0; i < n; i++) {
        char number[TACET_NUMBER_TEXT];
        REQUIRE(isfinite(value[i]));
        end += sprintf(end, "%s%s", i ? ", " : "", tacet_number_format(value[i], number));
    }
    REQUIRE(tacet_list_parse(out, MOST_VALUES, a, &again, &m, &e) == TACET_OK);
    REQUIRE(m == n && memcmp(value, again, n * sizeof *value) == 0);
    free(out);
}

// A range alone: runs from its first value, never past its last, in one direction.
static void check_range(const char *text, tacet_arena *a)
{
    char from[64], to[64], step[64], rest;
    double v[3], *value = NULL;
    size_t n = 0;
    if (strlen(text) > 120) return;
    if (sscanf(text, "%63[^:]:%63[^:]:%63[^:,]%c", from, to, step, &rest) != 3) return;
    if (!tacet_number_parse(from, &v[0]) || !tacet_number_parse(to, &v[1]) ||
        !tacet_number_parse(step, &v[2]))
        return;
    if (tacet_list_parse(text, MOST_VALUES, a, &value, &n, NULL) != TACET_OK) return;
    REQUIRE(value[0] == v[0] || (n == 1 && value[0] == v[1]));
    for (size_t i = 0; i < n; i++)
        REQUIRE(v[2] > 0 ? value[i] <= v[1] : value[i] >= v[1]);
    REQUIRE(fabs(v[1] - value[n - 1]) <= fabs(v[2]) * (1 + 1e-5));
}

static void check_density(const char *text)
{
    unsigned fires = 99, length = 99, k = 0, l = 0;
    if (!tacet_density_parse(text, &fires, &length)) {
        REQUIRE(fires == 99 && length == 99);
        return;
    }
    REQUIRE(length >= 1 && length <= TACET_PATTERN_LONGEST && fires <= length);
    char out[32];
    snprintf(out, sizeof out, "%u/%u", fires, length);
    REQUIRE(tacet_density_parse(out, &k, &l) && k == fires && l == length);
}

static void check_line(const char *text, tacet_arena *a)
{
    static const char *const names[] = {"bore_mm", "stroke_mm", NULL, "kPa", "firing_order", ""};
    check_number(text);
    check_list(text, a);
    check_range(text, a);
    check_density(text);
    double factor = tacet_unit_factor(text);
    REQUIRE(isfinite(factor) && factor >= 0);
    const char *near = tacet_near_name(text, names, sizeof names / sizeof *names);
    REQUIRE(!near || *near);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    char *text = fuzz_text(data, size), *rest = text;
    tacet_arena *a = tacet_arena_create();
    REQUIRE(a);
    for (char *line; (line = strsep(&rest, "\n"));)
        check_line(line, a);
    tacet_arena_destroy(a);
    free(text);
    return 0;
}
