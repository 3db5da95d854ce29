# Order bars: each row a box as centre, edges left and right, bottom and top.
unset xtics
plot \
  $reference using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#b9cfe0' fillstyle solid border linecolor rgb '#7f9bb3' linewidth 1, \
  $pattern using 1:2:3:4:5:6 with boxxyerror fillcolor rgb '#24507a' fillstyle solid border linecolor rgb '#24507a' linewidth 1
