// usage: golden check|spread|write FOLDER STUDY.yaml NAME
//   check   solves what FOLDER/NAME.rows asks for and screens the study, compares with
//           NAME.rows and NAME.screen, by FOLDER/tolerance; 1: they differ
//   spread  the same, and prints of each column the largest difference that was met
//   write   writes both files anew (refresh.sh decides when)
#include "compare.h"
#include "values.h"
#include <gsl/gsl_errno.h>
#include <stdlib.h>
#include <string.h>

golden_study golden_study_open(const char *path)
{
    golden_study s = {0};
    tacet_error e = {.text = ""};
    tacet_problems *problems = tacet_problems_create();
    if (!problems || tacet_study_read(path, problems, &s.study) != TACET_OK)
        golden_stop("%s is no good study", path);
    tacet_problems_destroy(problems);
    tacet_status status = tacet_model_create(s.study, &s.model, &e);
    if (status == TACET_OK) status = tacet_model_prepare(s.model, &e);
    if (status == TACET_OK) status = tacet_workspace_create(s.model, &s.work);
    if (status != TACET_OK) golden_stop("%s: %s", path, e.text);
    return s;
}

void golden_study_close(golden_study *s)
{
    tacet_workspace_destroy(s->work);
    tacet_model_destroy(s->model);
    tacet_study_destroy(s->study);
}

static void write_page(const golden_page *p, const char *path, const char *title)
{
    FILE *to = fopen(path, "w");
    if (!to) golden_stop("%s cannot be written", path);
    fprintf(to, "# %s. Written by refresh.sh, never by hand.\n", title);
    golden_write(p, to);
    if (fclose(to) != 0) golden_stop("%s cannot be written", path);
}

static size_t unused(const golden_tolerances *t)
{
    size_t n = 0;
    for (size_t i = 0; i < t->n; i++) {
        if (t->line[i].used) continue;
        printf("tolerance: no page has a column %s\n", t->line[i].column);
        n++;
    }
    return n;
}

static void print_spread(const golden_tolerances *t)
{
    for (size_t i = 0; i < t->n; i++)
        if (t->line[i].worst > 0)
            printf("%-20s off %8.2e, %8.2e of its tolerance: %s\n", t->line[i].column,
                   t->line[i].off, t->line[i].worst, t->line[i].worst_at);
}

static int check(const char *folder, const char *name, const golden_page golden[2],
                 const golden_page now[2], bool spread)
{
    golden_tolerances t;
    size_t differences = 0;
    static const char *const kind[] = {"rows", "screen"};
    char path[1024];
    snprintf(path, sizeof path, "%s/tolerance", folder);
    golden_tolerances_read(path, &t);
    for (int i = 0; i < 2; i++) {
        snprintf(path, sizeof path, "%s.%s", name, kind[i]);
        differences += golden_compare(path, &golden[i], &now[i], &t, stdout);
    }
    differences += unused(&t);
    if (spread) print_spread(&t);
    if (differences)
        printf("%zu differences; if they are meant: sh tests/golden/refresh.sh\n", differences);
    golden_page_clear(&t.page);
    return differences ? 1 : 0;
}

int main(int argc, char **argv)
{
    if (argc != 5) golden_stop("usage: golden check|spread|write FOLDER STUDY.yaml NAME");
    gsl_set_error_handler_off();
    bool write = strcmp(argv[1], "write") == 0;
    char rows[1024], screen[1024];
    golden_page golden[2], now[2] = {golden_page_start(), golden_page_start()};
    snprintf(rows, sizeof rows, "%s/%s.rows", argv[2], argv[4]);
    snprintf(screen, sizeof screen, "%s/%s.screen", argv[2], argv[4]);
    golden_read(rows, &golden[0]);
    golden_study s = golden_study_open(argv[3]);
    golden_rows(&s, &golden[0], &now[0]);
    golden_screen(&s, &now[1]);
    golden_study_close(&s);
    int code = 0;
    if (write) {
        write_page(&now[0], rows, "Rows of single conditions");
        write_page(&now[1], screen, "The whole screen");
    } else {
        golden_read(screen, &golden[1]);
        code = check(argv[2], argv[4], golden, now, strcmp(argv[1], "spread") == 0);
        golden_page_clear(&golden[1]);
    }
    golden_page_clear(&golden[0]);
    golden_page_clear(&now[0]);
    golden_page_clear(&now[1]);
    return code;
}
