# Modes of the body: each row a box as centre, edges left and right, bottom and top; a block for each
# direction. Moves are solid and grow darker, turns are hatched.
unset xtics
set xzeroaxis linetype 1 linecolor rgb '#5f6b7a' linewidth 1
set format y '%g %%'
plot \
  $x using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#dbe7f1' fillstyle solid border linecolor rgb '#24507a' linewidth 1, \
  $y using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#8fb3d1' fillstyle solid border linecolor rgb '#24507a' linewidth 1, \
  $z using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#24507a' fillstyle solid border linecolor rgb '#24507a' linewidth 1, \
  $roll using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#a3324a' fillstyle pattern 5 border linecolor rgb '#a3324a' linewidth 1, \
  $pitch using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#8a5a12' fillstyle pattern 4 border linecolor rgb '#8a5a12' linewidth 1, \
  $yaw using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#3f4a56' fillstyle pattern 2 border linecolor rgb '#3f4a56' linewidth 1
