# What every drawing begins with. Texts are labels at places that the program works out; nothing
# here reads a word of a study.
set encoding utf8
unset key
set border 3 linecolor rgb '#5f6b7a' linewidth 1
set tics out nomirror scale 0.6 font ',14' textcolor rgb '#1f2933'
set xtics format '%g' offset 0,0.3
set ytics format '%g'
