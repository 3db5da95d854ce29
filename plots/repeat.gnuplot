# Two panels over one axis of crank angle; heavy traces above light ones. The places of the panels
# and their ranges come as variables.
set multiplot
set tmargin at screen upper_top
set bmargin at screen upper_bottom
set yrange [upper_low:upper_high]
set ytics upper_step
set xtics format ''
plot \
  $pressure_light using 1:2 with lines linecolor rgb '#b3bec9' linewidth 1, \
  $pressure_0 using 1:2 with lines linecolor rgb '#24507a' linewidth 2.2, \
  $pressure_1 using 1:2 with lines linecolor rgb '#d08a2e' linewidth 2.2 dashtype (12, 4), \
  $pressure_2 using 1:2 with lines linecolor rgb '#a3324a' linewidth 2.2 dashtype (3, 3)
unset label
unset object
unset arrow
set tmargin at screen lower_top
set bmargin at screen lower_bottom
set yrange [lower_low:lower_high]
set ytics lower_step
set xtics format '%g'
plot \
  $torque_light using 1:2 with lines linecolor rgb '#b3bec9' linewidth 1, \
  $torque_0 using 1:2 with lines linecolor rgb '#24507a' linewidth 2.2, \
  $torque_1 using 1:2 with lines linecolor rgb '#d08a2e' linewidth 2.2 dashtype (12, 4), \
  $torque_2 using 1:2 with lines linecolor rgb '#a3324a' linewidth 2.2 dashtype (3, 3)
unset multiplot
