# Order lines over speed. Rays: segments as start and difference; circles: place, point size, colour.
plot \
  $rays using 1:2:3:4 with vectors nohead linecolor rgb '#aab4be' linewidth 1, \
  $modes using 1:2:3:4 with vectors nohead linecolor rgb '#1f2933' linewidth 1.2 dashtype (8, 5), \
  $circles using 1:2:3:4 with points pointtype 7 pointsize variable linecolor rgb variable
