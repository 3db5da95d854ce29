# Density over speed. Cells: speed, row, then the edges of both, then a colour.
set border 0
unset ytics
set xtics scale 0.6
plot \
  $cells using 1:2:3:4:5:6:7 with boxxyerror fillcolor rgb variable fillstyle solid noborder, \
  $hatched using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#9aa5b1' fillstyle pattern 5 noborder, \
  $ranges using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#1f2933' fillstyle solid noborder, \
  $over using 1:2:3 with labels font 'sans-serif Bold,15' textcolor rgb '#ffffff', \
  $near using 1:2:3 with labels font ',15' textcolor rgb '#3a2710', \
  $other using 1:2:3 with labels font ',15' textcolor rgb '#5f6b7a', \
  $clear using 1:2 with points pointtype 7 pointsize 0.35 linecolor rgb '#6f8ea3', \
  $outline using 1:2:3:4:5:6 with boxxyerror fillstyle empty border linecolor rgb '#0b1f33' linewidth 2.6
