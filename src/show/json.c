// A JSON writer that holds nothing back: each call writes. Objects begin a line for every member,
// arrays only for members that are objects or arrays.
#include "show/text.h"
#include "tacet/show.h"
#include <inttypes.h>
#include <math.h>

tacet_json tacet_json_start(FILE *to)
{
    return (tacet_json){.to = to};
}

static void new_line(tacet_json *j)
{
    fputc('\n', j->to);
    for (unsigned i = 0; i < j->depth; i++)
        fputs("  ", j->to);
}

// Writes what stands before a value; false: no value may stand here.
static bool before_value(tacet_json *j, bool container)
{
    bool in_object = j->depth > 0 && !j->array[j->depth];
    bool second_root = j->depth == 0 && j->started[0];
    if (j->wrong || second_root || in_object != j->keyed) {
        j->wrong = true;
        return false;
    }
    if (j->depth > 0 && !in_object) {
        if (j->started[j->depth]) fputs(container ? "," : ", ", j->to);
        if (container) new_line(j);
        j->broken[j->depth] = container;
    }
    j->started[j->depth] = true;
    j->keyed = false;
    return true;
}

static void begin(tacet_json *j, bool array)
{
    if (j->depth == TACET_JSON_DEPTH) j->wrong = true;
    if (!before_value(j, true)) return;
    fputc(array ? '[' : '{', j->to);
    j->depth++;
    j->array[j->depth] = array;
    j->started[j->depth] = j->broken[j->depth] = false;
}

static void end(tacet_json *j, bool array)
{
    if (j->wrong || j->depth == 0 || j->array[j->depth] != array || j->keyed) {
        j->wrong = true;
        return;
    }
    bool broken = j->broken[j->depth];
    j->depth--;
    if (broken) new_line(j);
    fputc(array ? ']' : '}', j->to);
}

void tacet_json_begin_object(tacet_json *j)
{
    begin(j, false);
}

void tacet_json_end_object(tacet_json *j)
{
    end(j, false);
}

void tacet_json_begin_array(tacet_json *j)
{
    begin(j, true);
}

void tacet_json_end_array(tacet_json *j)
{
    end(j, true);
}

static void quoted(FILE *to, const char *text)
{
    fputc('"', to);
    for (size_t bytes; *text; text += bytes) {
        uint32_t code;
        bytes = text_next(text, &code);
        if (code == '"' || code == '\\')
            fprintf(to, "\\%c", (int)code);
        else if (code == '\n')
            fputs("\\n", to);
        else if (code == '\t')
            fputs("\\t", to);
        else if (code < 0x20 || code == 0x7f)
            fprintf(to, "\\u%04x", (unsigned)code);
        else if (code == TEXT_INVALID)
            fputs("\xef\xbf\xbd", to);
        else
            fwrite(text, 1, bytes, to);
    }
    fputc('"', to);
}

void tacet_json_key(tacet_json *j, const char *key)
{
    if (j->wrong || j->depth == 0 || j->array[j->depth] || j->keyed || !key) {
        j->wrong = true;
        return;
    }
    if (j->started[j->depth]) fputc(',', j->to);
    j->broken[j->depth] = true;
    new_line(j);
    quoted(j->to, key);
    fputs(": ", j->to);
    j->keyed = true;
}

void tacet_json_number(tacet_json *j, double value)
{
    char text[TACET_NUMBER_TEXT];
    if (before_value(j, false))
        fputs(isfinite(value) ? tacet_number_format(value, text) : "null", j->to);
}

void tacet_json_count(tacet_json *j, uint64_t value)
{
    if (before_value(j, false)) fprintf(j->to, "%" PRIu64, value);
}

void tacet_json_text(tacet_json *j, const char *text)
{
    if (!before_value(j, false)) return;
    if (text)
        quoted(j->to, text);
    else
        fputs("null", j->to);
}

void tacet_json_bool(tacet_json *j, bool value)
{
    if (before_value(j, false)) fputs(value ? "true" : "false", j->to);
}

void tacet_json_null(tacet_json *j)
{
    if (before_value(j, false)) fputs("null", j->to);
}

void tacet_json_put_number(tacet_json *j, const char *key, double value)
{
    tacet_json_key(j, key);
    tacet_json_number(j, value);
}

void tacet_json_put_count(tacet_json *j, const char *key, uint64_t value)
{
    tacet_json_key(j, key);
    tacet_json_count(j, value);
}

void tacet_json_put_text(tacet_json *j, const char *key, const char *text)
{
    tacet_json_key(j, key);
    tacet_json_text(j, text);
}

void tacet_json_put_bool(tacet_json *j, const char *key, bool value)
{
    tacet_json_key(j, key);
    tacet_json_bool(j, value);
}

tacet_status tacet_json_finish(tacet_json *j, const char *what, tacet_error *e)
{
    fputc('\n', j->to);
    if (j->wrong || j->depth != 0 || !j->started[0])
        return tacet_fail(e, TACET_BAD_INPUT, "JSON calls out of order, %u levels left open",
                          j->depth);
    return tacet_stream_check(j->to, what, e);
}
