# What paths bring to points: boxes in pixels of the drawing, as centre, edges left and right, bottom
# and top.
set border 0
unset xtics
unset ytics
plot \
  $adds using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#24507a' fillstyle solid border linecolor rgb '#24507a' linewidth 1, \
  $takes using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#a3324a' fillstyle pattern 5 border linecolor rgb '#a3324a' linewidth 1
