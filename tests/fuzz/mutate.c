// For inputs that are mostly numbers: half of the changes put another number in the place of one.
// The other half are libFuzzer's own.
#include "fuzz.h"
#include <ctype.h>

size_t LLVMFuzzerMutate(uint8_t *data, size_t size, size_t most) __attribute__((weak));
size_t LLVMFuzzerCustomMutator(uint8_t *data, size_t size, size_t most, unsigned seed);

static const char *const numbers[] = {
    "0",     "-1",   "1",      "2",           "3",       "0.5",      "1e-6",       "1e6",
    "1e-12", "1e12", "1e-300", "1e300",       "1e308",   "4.9e-324", "32",         "33",
    "60",    "64",   "65",     "100",         "1000",    "10000",    "20000",      "360",
    "720",   "90",   "180",    "0.0001",      "99.9999", "1.5",      "4294967295", "4294967296",
    "1:5:1", "1e18", "-0",     "10:20000:10", "16",      "17",       "0.999999",   "1.000001"};

static bool in_number(uint8_t c)
{
    return isdigit(c) || c == '.' || c == '-' || c == '+';
}

// The number at or after `from`: its end, or the size when there is none; *start gets its begin.
static size_t find_number(const uint8_t *data, size_t size, size_t from, size_t *start)
{
    size_t at = from;
    while (at < size && !isdigit(data[at]))
        at++;
    *start = at;
    while (*start > 0 && in_number(data[*start - 1]))
        --*start;
    while (at < size && in_number(data[at]))
        at++;
    return at;
}

size_t LLVMFuzzerCustomMutator(uint8_t *data, size_t size, size_t most, unsigned seed)
{
    size_t start, n = sizeof numbers / sizeof *numbers;
    if (LLVMFuzzerMutate && seed % 2) return LLVMFuzzerMutate(data, size, most);
    unsigned pick = seed / 2;
    size_t end = find_number(data, size, size ? pick % size : 0, &start);
    const char *number = numbers[pick / 7919 % n];
    size_t letters = strlen(number), rest = size - end;
    if (start >= end || start + letters + rest > most)
        return LLVMFuzzerMutate ? LLVMFuzzerMutate(data, size, most) : size;
    memmove(data + start + letters, data + end, rest);
    memcpy(data + start, number, letters);
    return start + letters + rest;
}
