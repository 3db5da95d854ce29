s/^title: .*/title: "a'b\\"c`touch ran1`$(touch ran2)<script>alert(1)<\/script>|%s%n%d\\n\\u001b[31mred {\/=40 big} @x ^y _z \\\\ caf\\u00e9 \\u202egnp"/
s/name: coupling band/name: "band '`touch ran3`' $(touch ran4) \\"<b>\&%s\\" |touch ran5"/
s/name: seat/name: "|touch ran6; system('touch ran7')"/
s/name: crank stress/name: "stress, \\"quoted\\"; =1+1"/
/^title/!s/\([:,] \)pump/\1"pu'mp `touch ran8` <i>"/
