#include "tacet/base.h"
#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

// Numbers longer than this carry no more information than a double holds.
#define LONGEST_NUMBER 400

static const char *digits(const char *s)
{
    while (*s >= '0' && *s <= '9')
        s++;
    return s;
}

// End of the longest number at s in the decimal grammar, or NULL.
static const char *number_end(const char *s)
{
    if (*s == '+' || *s == '-') s++;
    const char *whole = digits(s), *end = whole;
    size_t n = (size_t)(whole - s);
    if (*end == '.') {
        const char *part = digits(end + 1);
        n += (size_t)(part - end - 1);
        end = part;
    }
    if (n == 0) return NULL;
    if (*end == 'e' || *end == 'E') {
        const char *power = end + 1;
        if (*power == '+' || *power == '-') power++;
        const char *past = digits(power);
        if (past == power) return NULL;
        end = past;
    }
    return end;
}

bool tacet_number_parse(const char *text, double *out)
{
    const char *end = number_end(text);
    if (!end || *end || end - text > LONGEST_NUMBER) return false;
    locale_t plain = newlocale(LC_ALL_MASK, "C", (locale_t)0);
    if (!plain) return false;
    double value = strtod_l(text, NULL, plain);
    freelocale(plain);
    if (!isfinite(value)) return false;
    *out = value;
    return true;
}

const char *tacet_number_format(double value, char out[TACET_NUMBER_TEXT])
{
    static const int enough[] = {15, 16, 17};
    if (!isfinite(value)) return strcpy(out, "null");
    for (size_t i = 0; i < 3; i++) {
        double back;
        tacet_text(out, TACET_NUMBER_TEXT, "%.*g", enough[i], value);
        if (tacet_number_parse(out, &back) && back == value) break;
    }
    return out;
}

// "1.500" becomes "1.5", "2." becomes "2".
static void drop_zeros(char *text)
{
    if (!strchr(text, '.')) return;
    char *end = text + strlen(text);
    while (end[-1] == '0')
        end--;
    if (end[-1] == '.') end--;
    *end = '\0';
}

// "1.50e+07" becomes "1.5e7".
static void tidy_power(char *text)
{
    char *e = strchr(text, 'e');
    if (!e) return;
    long power = strtol(e + 1, NULL, 10);
    *e = '\0';
    drop_zeros(text);
    size_t n = strlen(text);
    snprintf(text + n, TACET_NUMBER_TEXT - n, "e%ld", power);
}

const char *tacet_number_format_short(double value, int digits, char out[TACET_NUMBER_TEXT])
{
    if (!isfinite(value)) return strcpy(out, "null");
    if (value == 0) return strcpy(out, "0");
    if (digits < 1) digits = 1;
    if (digits > 17) digits = 17;
    double size = fabs(value);
    if (size >= 1e-3 && size < 1e7) {
        int decimals = digits - 1 - (int)floor(log10(size));
        tacet_text(out, TACET_NUMBER_TEXT, "%.*f", decimals > 0 ? decimals : 0, value);
        drop_zeros(out);
        return out;
    }
    tacet_text(out, TACET_NUMBER_TEXT, "%.*e", digits - 1, value);
    tidy_power(out);
    return out;
}
