// What the map and its key share. Private to show.
#ifndef SHOW_FIGURE_MAP_H
#define SHOW_FIGURE_MAP_H
#include "show/canvas.h"

#define MAP_KEY_PX        272.0
#define MAP_LIMITING_MOST 64  // bands and limits with a letter
#define MAP_LETTER_OTHERS '*' // beyond the alphabet

// 0xRRGGBB of a cell, in steps of 1 dB.
unsigned map_colour(tacet_mark mark, double margin_db, double reserve_db);
// Has every cell room for a letter or a dot?
bool map_has_room(const canvas *c, const tacet_figure_map *f);
// letter[i]: of f->limiting[i], 0 where it limits nowhere.
void map_key(canvas *c, const tacet_figure_map *f, const char *letter, double x);

#endif
