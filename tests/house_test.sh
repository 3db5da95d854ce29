#!/bin/sh
# usage: sh tests/house_test.sh   does tests/house.sh see each kind of fault?
# Plants one fault at a time into a small tree that is in order.
set -eu
house=$(cd "$(dirname "$0")" && pwd)/house.sh
tree=$(mktemp -d)
trap 'rm -rf "$tree"' EXIT
wrong=0

plant() { # the tree in order, before a fault
    rm -rf "$tree"
    mkdir -p "$tree/src/base" "$tree/src/train" "$tree/include/tacet" "$tree/tests/base"
    cat >"$tree/include/tacet/base.h" <<'END'
// Length of a shaft with a bore, m.
double tacet_length(double outer_m, double inner_m);
void tacet_destroy(void *p); // accepts NULL
typedef struct {
    double torque_Nm, stiffness_Nm_per_rad; // of a link
    double ratio;
} tacet_shaft;
END
    cat >"$tree/src/base/keys.c" <<'END'
#define STIFF .unit = "N m/rad", .low = 0
static const tacet_field friction_fields[] = {
    {.key = "constant", .unit = "kPa"},
    {.key = "per_krpm", .unit = "kPa"},
    {0}};
static const tacet_section friction_section = {
    .name = "friction_kpa", .fields = friction_fields};
static const tacet_field shaft_fields[] = {
    {.key = "length_mm", .unit = "mm"},
    {.key = "stiffness_nm_per_rad", STIFF},
    {.key = "ratio"},
    {0}};
static const tacet_section shaft_section = {.name = "shaft", .fields = shaft_fields};
END
    printf '#include "tacet/base.h"\n\nstatic int one(void)\n{\n    return 1;\n}\n' \
        >"$tree/src/train/one.c"
    printf 'int main(void)\n{\n    return 0;\n}\n' >"$tree/tests/base/test_one.c"
    echo 'no-unit include/tacet/base.h ratio a pure number' >"$tree/tests/house.reasons"
}

# $1: what must be said, or nothing for a tree in order
expect() {
    status=0
    sh "$house" "$tree" >"$tree/said" 2>&1 || status=$?
    if [ -z "$1" ]; then
        [ "$status" = 0 ] && return
    elif [ "$status" = 1 ] && grep -qF -- "$1" "$tree/said" &&
        [ "$(wc -l <"$tree/said")" -le 2 ]; then
        return
    fi
    echo "expected: ${1:-nothing to say}; exit $status and:"
    cat "$tree/said"
    wrong=$((wrong + 1))
}

lines() { awk -v n="$1" 'BEGIN { for (i = 0; i < n; i++) print "    x();" }'; }

plant
expect ''

plant
{ printf 'int long_one(int a)\n{\n'; lines 60; echo '}'; } >"$tree/src/train/two.c"
expect ''
{ printf 'static int long_one(int a,\n    int b)\n{\n'; lines 61; echo '}'; } \
    >"$tree/src/train/two.c"
expect 'src/train/two.c:3: long_one, 61 lines (long-function)'

plant
lines 700 >"$tree/tests/base/big.h"
expect ''
lines 701 >"$tree/tests/base/big.h"
expect 'tests/base/big.h:701: 701 lines (long-file)'

plant
printf 'int f(int a, int b, int c, int (*d)(int, int), int e, int g, int h)\n{\n}\n' \
    >"$tree/src/train/two.c"
expect ''
printf 'int f(int a, int b, int c, int (*d)(int, int), int e, int g, int h,\n    int i)\n{\n}\n' \
    >"$tree/src/train/two.c"
expect 'f takes 8 (many-parameters)'
plant
printf '// all\nint f(int a, int b, int c, int d, int e, int g, int h,\n    int i);\n' \
    >>"$tree/include/tacet/base.h"
expect 'include/tacet/base.h:9: f takes 8 (many-parameters)'

plant
printf '\nvoid tacet_bare(void);\n' >>"$tree/include/tacet/base.h"
expect 'include/tacet/base.h:9: tacet_bare (no-comment)'
plant
printf '// of the first\nvoid tacet_first(void);\nint tacet_bare(int a,\n    int b);\n' \
    >>"$tree/include/tacet/base.h"
expect 'include/tacet/base.h:10: tacet_bare (no-comment)'

for fault in 'double torque;' 'double *torque;' 'double length_m, torque;' 'tacet_curve torque;' \
    'const double complex *torque;' 'double torque[4];' 'double torque_rad_per_turn;'; do
    plant
    sed "s/double ratio;/double ratio;\n    $fault/" "$tree/include/tacet/base.h" >"$tree/said"
    cp "$tree/said" "$tree/include/tacet/base.h"
    expect 'include/tacet/base.h:7: torque'
done
for fault in 'double torque' 'int i, const double *torque' 'double length_m, double torque, int i' \
    'void *who, void (*tell)(void *who, double torque)'; do
    plant
    printf '// said\nvoid tacet_turn(%s);\n' "$fault" >>"$tree/include/tacet/base.h"
    expect 'include/tacet/base.h:9: torque (no-unit)'
done
plant
printf '// said\nvoid tacet_turn(double speed_rpm);\n' >>"$tree/include/tacet/base.h"
expect 'include/tacet/base.h:9: speed_rpm (not-si)'

plant
sed 's/"length_mm"/"length"/' "$tree/src/base/keys.c" >"$tree/said"
cp "$tree/said" "$tree/src/base/keys.c"
expect 'src/base/keys.c:9: shaft: length (key-without-unit)'
plant
sed 's/"stiffness_nm_per_rad"/"stiffness"/' "$tree/src/base/keys.c" >"$tree/said"
cp "$tree/said" "$tree/src/base/keys.c"
expect 'src/base/keys.c:10: shaft: stiffness (key-without-unit)'
plant
sed 's/friction_kpa/friction/' "$tree/src/base/keys.c" >"$tree/said"
cp "$tree/said" "$tree/src/base/keys.c"
expect 'src/base/keys.c:3: friction: constant (key-without-unit)'

plant
printf '// %098d\n' 1 >>"$tree/tests/base/test_one.c"
expect 'tests/base/test_one.c:5: 101 columns (long-line)'

plant
echo '#include "tacet/condition.h"' >>"$tree/src/train/one.c"
expect 'train may not include condition'
plant
echo '#include "base/text.h"' >>"$tree/src/train/one.c"
expect 'private header of base used from train'

plant
echo 'no-unit include/tacet/base.h torque_Nm has none' >>"$tree/tests/house.reasons"
expect 'tests/house.reasons:2: nothing to excuse: no-unit include/tacet/base.h torque_Nm'
plant
echo 'no-unit include/tacet/base.h ratio' >"$tree/tests/house.reasons"
expect 'tests/house.reasons:1: gives no reason'
plant
rm -r "$tree/src/base" "$tree/src/train"
expect 'no files in src'

[ "$wrong" = 0 ]
