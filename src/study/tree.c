#include "tree.h"
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <yaml.h>

#define POOL_BYTES 32768

typedef struct {
    const char *name;
    tree_node *node;
    bool open; // its content is still being read
} anchor;

typedef struct { // a list or map being read
    tree_node *node;
    tree_node **child, **key;
    size_t n, size;
    tree_node *waiting; // key of a map whose value comes next
    const char *anchor_name;
} frame;

typedef struct {
    const char *file;
    const char *bytes;
    size_t n_bytes;
    tacet_arena *arena;
    tacet_problems *problems;
    yaml_parser_t parser;
    frame open[TREE_MOST_DEPTH];
    size_t depth;
    anchor anchors[TREE_MOST_ANCHORS]; // sorted by name
    size_t n_anchors;
    size_t nodes; // aliases written out
    unsigned char *pool;
    size_t pool_left;
    tree_node *root;
    bool done, faulty;
} reader;

static TACET_PRINTF(4, 5) tacet_status
    refuse(reader *r, int line, int column, const char *format, ...)
{
    char text[512];
    va_list args;
    va_start(args, format);
    vsnprintf(text, sizeof text, format, args);
    va_end(args);
    tacet_problems_add(r->problems, false, r->file, line, column, "%s", text);
    return TACET_BAD_INPUT;
}

// Small pieces of the arena without its alignment to cache lines.
static void *take(reader *r, size_t bytes)
{
    bytes = (bytes + 7) / 8 * 8;
    if (bytes > POOL_BYTES / 4) return tacet_arena_alloc(r->arena, bytes);
    if (bytes > r->pool_left) {
        r->pool = tacet_arena_alloc(r->arena, POOL_BYTES);
        r->pool_left = r->pool ? POOL_BYTES : 0;
        if (!r->pool) return NULL;
    }
    void *p = r->pool;
    r->pool += bytes;
    r->pool_left -= bytes;
    return p;
}

static tree_node *new_node(reader *r, tree_kind kind, const yaml_mark_t *mark)
{
    tree_node *node = take(r, sizeof *node);
    if (!node) return NULL;
    *node = (tree_node){.kind = kind,
                        .line = (int)mark->line + 1,
                        .column = (int)mark->column + 1,
                        .weight = 1,
                        .text = ""};
    return node;
}

// ---- anchors
static size_t anchor_place(const reader *r, const char *name, bool *found)
{
    size_t low = 0, high = r->n_anchors;
    *found = false;
    while (low < high) {
        size_t middle = low + (high - low) / 2;
        int c = strcmp(r->anchors[middle].name, name);
        if (c == 0) {
            *found = true;
            return middle;
        }
        if (c < 0)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

static tacet_status add_anchor(reader *r, const yaml_char_t *text, tree_node *node,
                               const char **name)
{
    *name = NULL;
    if (!text) return TACET_OK;
    bool found;
    size_t at = anchor_place(r, (const char *)text, &found);
    if (found)
        return refuse(r, node->line, node->column,
                      "anchor &%.60s a second time; the first is at line %d", (const char *)text,
                      r->anchors[at].node->line);
    if (r->n_anchors == TREE_MOST_ANCHORS)
        return refuse(r, node->line, node->column, "more than %d anchors", TREE_MOST_ANCHORS);
    char *copy = take(r, strlen((const char *)text) + 1);
    if (!copy) return TACET_NO_MEMORY;
    strcpy(copy, (const char *)text);
    memmove(&r->anchors[at + 1], &r->anchors[at], (r->n_anchors - at) * sizeof *r->anchors);
    r->anchors[at] = (anchor){copy, node, node->kind != TREE_TEXT};
    r->n_anchors++;
    *name = copy;
    return TACET_OK;
}

static void close_anchor(reader *r, const char *name)
{
    bool found = false;
    size_t at = name ? anchor_place(r, name, &found) : 0;
    if (found) r->anchors[at].open = false;
}

// ---- nodes
static tacet_status grow(frame *f)
{
    if (f->n < f->size) return TACET_OK;
    size_t size = f->size ? f->size * 2 : 8;
    tree_node **child = realloc(f->child, size * sizeof *child);
    if (!child) return TACET_NO_MEMORY;
    f->child = child;
    tree_node **key = realloc(f->key, size * sizeof *key);
    if (!key) return TACET_NO_MEMORY;
    f->key = key;
    f->size = size;
    return TACET_OK;
}

static tacet_status take_key(reader *r, frame *f, tree_node *node, bool alias)
{
    if (alias || node->kind != TREE_TEXT)
        return refuse(r, node->line, node->column, "a key must be a plain word%s",
                      alias ? "; this one is used as a key by an alias" : "");
    if (strcmp(node->text, "<<") == 0 && !node->quoted)
        return refuse(r, node->line, node->column,
                      "'<<' has no meaning here: write the keys out, or give the whole map by an "
                      "alias");
    f->waiting = node;
    return TACET_OK;
}

// Hangs a node where the reader stands.
static tacet_status hang(reader *r, tree_node *node, bool alias)
{
    r->nodes += node->weight;
    if (r->nodes > TREE_MOST_NODES)
        return refuse(r, node->line, node->column,
                      "more than %d values%s: this is no study that a person wrote",
                      TREE_MOST_NODES, alias ? ", aliases written out" : "");
    if (r->depth == 0) {
        r->root = node;
        return TACET_OK;
    }
    frame *f = &r->open[r->depth - 1];
    f->node->weight += node->weight;
    if (f->node->kind == TREE_MAP && !f->waiting) return take_key(r, f, node, alias);
    tacet_status status = grow(f);
    if (status) return status;
    f->child[f->n] = node;
    f->key[f->n] = f->waiting;
    f->n++;
    f->waiting = NULL;
    return TACET_OK;
}

static tacet_status refuse_tag(reader *r, const yaml_char_t *tag, const yaml_mark_t *mark)
{
    return refuse(r, (int)mark->line + 1, (int)mark->column + 1,
                  "a tag (%.60s): tags have no meaning here, the key says what a value is",
                  (const char *)tag);
}

static tacet_status read_text(reader *r, const yaml_event_t *event)
{
    if (event->data.scalar.tag) return refuse_tag(r, event->data.scalar.tag, &event->start_mark);
    tree_node *node = new_node(r, TREE_TEXT, &event->start_mark);
    size_t n = event->data.scalar.length;
    char *copy = node ? take(r, n + 1) : NULL;
    if (!copy) return TACET_NO_MEMORY;
    memcpy(copy, event->data.scalar.value, n);
    copy[n] = '\0';
    if (strlen(copy) != n) return refuse(r, node->line, node->column, "a zero byte inside a text");
    node->text = copy;
    node->quoted = event->data.scalar.style != YAML_PLAIN_SCALAR_STYLE;
    const char *name;
    tacet_status status = add_anchor(r, event->data.scalar.anchor, node, &name);
    return status ? status : hang(r, node, false);
}

static tacet_status open_node(reader *r, tree_kind kind, const yaml_event_t *event)
{
    bool list = kind == TREE_LIST;
    const yaml_char_t *tag = list ? event->data.sequence_start.tag : event->data.mapping_start.tag;
    const yaml_char_t *name =
        list ? event->data.sequence_start.anchor : event->data.mapping_start.anchor;
    if (tag) return refuse_tag(r, tag, &event->start_mark);
    tree_node *node = new_node(r, kind, &event->start_mark);
    if (!node) return TACET_NO_MEMORY;
    if (r->depth == TREE_MOST_DEPTH)
        return refuse(r, node->line, node->column, "lists and maps more than %d deep",
                      TREE_MOST_DEPTH);
    frame *above = r->depth ? &r->open[r->depth - 1] : NULL;
    if (above && above->node->kind == TREE_MAP && !above->waiting)
        return refuse(r, node->line, node->column, "a key must be a plain word");
    frame f = {.node = node};
    tacet_status status = add_anchor(r, name, node, &f.anchor_name);
    if (status) return status;
    r->nodes++;
    r->open[r->depth++] = f;
    return TACET_OK;
}

typedef struct {
    tree_node *key;
    size_t at;
} sorted_key;

static int by_text(const void *a, const void *b)
{
    const sorted_key *left = a, *right = b;
    int c = strcmp(left->key->text, right->key->text);
    return c ? c : (left->at > right->at) - (left->at < right->at);
}

static tacet_status report_repeats(reader *r, const frame *f)
{
    if (f->n < 2) return TACET_OK;
    sorted_key *keys = malloc(f->n * sizeof *keys);
    if (!keys) return TACET_NO_MEMORY;
    for (size_t i = 0; i < f->n; i++)
        keys[i] = (sorted_key){f->key[i], i};
    qsort(keys, f->n, sizeof *keys, by_text);
    for (size_t i = 1, first = 0; i < f->n; i++) {
        if (strcmp(keys[first].key->text, keys[i].key->text) != 0) {
            first = i;
            continue;
        }
        const tree_node *key = keys[i].key;
        (void)refuse(r, key->line, key->column, "'%.60s' a second time; the first is at line %d",
                     key->text, keys[first].key->line);
        r->faulty = true;
    }
    free(keys);
    return TACET_OK;
}

static tacet_status close_node(reader *r)
{
    frame f = r->open[--r->depth];
    tacet_status status = TACET_OK;
    tree_node *node = f.node;
    if (f.n) {
        node->n = f.n;
        node->child = take(r, f.n * sizeof *node->child);
        node->key = node->kind == TREE_MAP ? take(r, f.n * sizeof *node->key) : NULL;
        if (!node->child || (node->kind == TREE_MAP && !node->key)) {
            status = TACET_NO_MEMORY;
        } else {
            memcpy(node->child, f.child, f.n * sizeof *f.child);
            if (node->key) memcpy(node->key, f.key, f.n * sizeof *f.key);
        }
    }
    if (!status && node->kind == TREE_MAP) status = report_repeats(r, &f);
    free(f.child);
    free(f.key);
    close_anchor(r, f.anchor_name);
    if (status) return status;
    r->nodes -= node->weight; // hang counts the whole
    return hang(r, node, false);
}

static tacet_status read_alias(reader *r, const yaml_event_t *event)
{
    int line = (int)event->start_mark.line + 1, column = (int)event->start_mark.column + 1;
    const char *name = (const char *)event->data.alias.anchor;
    bool found;
    size_t at = anchor_place(r, name, &found);
    if (!found)
        return refuse(r, line, column,
                      "alias *%.60s has no anchor before it: &%.60s and a value; a text that "
                      "begins with * needs quotes",
                      name, name);
    const anchor *to = &r->anchors[at];
    if (to->open)
        return refuse(r, line, column, "alias *%.60s lies inside what it stands for", name);
    return hang(r, to->node, true);
}

static tacet_status read_event(reader *r, const yaml_event_t *event)
{
    switch (event->type) {
    case YAML_DOCUMENT_START_EVENT:
        if (!r->root) return TACET_OK;
        return refuse(r, (int)event->start_mark.line + 1, (int)event->start_mark.column + 1,
                      "a second document; only one study may stand in a file");
    case YAML_SCALAR_EVENT:
        return read_text(r, event);
    case YAML_SEQUENCE_START_EVENT:
        return open_node(r, TREE_LIST, event);
    case YAML_MAPPING_START_EVENT:
        return open_node(r, TREE_MAP, event);
    case YAML_SEQUENCE_END_EVENT:
    case YAML_MAPPING_END_EVENT:
        return close_node(r);
    case YAML_ALIAS_EVENT:
        return read_alias(r, event);
    case YAML_STREAM_END_EVENT:
        r->done = true;
        return TACET_OK;
    default:
        return TACET_OK;
    }
}

// Line and column of a byte: libyaml marks faults of encoding 1:1 and gives the byte apart.
static void place_of_byte(const reader *r, size_t byte, int *line, int *column)
{
    *line = *column = 1;
    for (size_t i = 0; i < byte && i < r->n_bytes; i++) {
        unsigned char c = (unsigned char)r->bytes[i];
        if (c == '\n') {
            ++*line;
            *column = 1;
        } else if ((c & 0xC0) != 0x80) {
            ++*column;
        }
    }
}

static tacet_status explain(reader *r)
{
    const yaml_parser_t *p = &r->parser;
    int line = (int)p->problem_mark.line + 1, column = (int)p->problem_mark.column + 1;
    if (p->error == YAML_MEMORY_ERROR) return TACET_NO_MEMORY;
    if (p->error != YAML_READER_ERROR) {
        if (p->context && p->context_mark.line != p->problem_mark.line)
            return refuse(r, line, column, "%s (of what begins at line %d)",
                          tree_yaml_words(p->problem), (int)p->context_mark.line + 1);
        return refuse(r, line, column, "%s", tree_yaml_words(p->problem));
    }
    size_t byte = p->problem_offset;
    if (p->problem && strstr(p->problem, "trailing")) // back to where the letter begins
        while (byte > 0 && ((unsigned char)r->bytes[byte] & 0xC0) != 0xC0)
            byte--;
    place_of_byte(r, byte, &line, &column);
    if (p->problem && strstr(p->problem, "control"))
        return refuse(r, line, column, "%s", tree_yaml_words(p->problem));
    return refuse(r, line, column, "no UTF-8 text from here (byte 0x%02X); save the file as UTF-8",
                  byte < r->n_bytes ? (unsigned char)r->bytes[byte] : 0u);
}

static tacet_status read_events(reader *r)
{
    while (!r->done) {
        yaml_event_t event;
        if (!yaml_parser_parse(&r->parser, &event)) return explain(r);
        tacet_status status = read_event(r, &event);
        yaml_event_delete(&event);
        if (status) return status;
    }
    return r->faulty ? TACET_BAD_INPUT : TACET_OK;
}

static tacet_status refuse_encoding(reader *r)
{
    const unsigned char *b = (const unsigned char *)r->bytes;
    bool wide =
        r->n_bytes >= 2 && ((b[0] == 0xFF && b[1] == 0xFE) || (b[0] == 0xFE && b[1] == 0xFF));
    if (wide) return refuse(r, 1, 1, "the file is UTF-16 text; save it as UTF-8");
    if (r->n_bytes > TREE_MOST_BYTES)
        return refuse(r, 0, 0, "the file is larger than %zu MiB", TREE_MOST_BYTES >> 20);
    return TACET_OK;
}

tacet_status tree_read(const char *bytes, size_t n, const char *file, tacet_arena *a,
                       tacet_problems *problems, tacet_tree **out)
{
    reader *r = calloc(1, sizeof *r);
    tacet_tree *tree = tacet_arena_alloc(a, sizeof *tree);
    if (!r || !tree) {
        free(r);
        return TACET_NO_MEMORY;
    }
    r->file = file;
    bool marked = n >= 3 && memcmp(bytes, "\xEF\xBB\xBF", 3) == 0;
    r->bytes = bytes + (marked ? 3 : 0);
    r->n_bytes = n - (marked ? 3 : 0);
    r->arena = a;
    r->problems = problems;
    tacet_status status = refuse_encoding(r);
    if (!status && !yaml_parser_initialize(&r->parser)) status = TACET_NO_MEMORY;
    if (!status) {
        yaml_parser_set_input_string(&r->parser, (const unsigned char *)r->bytes, r->n_bytes);
        yaml_parser_set_encoding(&r->parser, YAML_UTF8_ENCODING);
        status = read_events(r);
        yaml_parser_delete(&r->parser);
    }
    while (r->depth) {
        r->depth--;
        free(r->open[r->depth].child);
        free(r->open[r->depth].key);
    }
    tree->file = file;
    tree->root = r->root;
    free(r);
    if (!status) *out = tree;
    return status;
}

tree_node *tree_find(const tree_node *map, const char *key, tree_node **key_node)
{
    if (!map || map->kind != TREE_MAP) return NULL;
    for (size_t i = 0; i < map->n; i++) {
        if (strcmp(map->key[i]->text, key) != 0) continue;
        if (key_node) *key_node = map->key[i];
        return map->child[i];
    }
    return NULL;
}
