#!/bin/sh
# usage: sh signals.sh TACET
# A run is interrupted while it waits for its study, prepares, screens, draws; it is killed and
# started anew.
. "$(dirname "$0")/help.sh"

sed 's/speeds_rpm: .*/speeds_rpm: 1000:2000:1/; s/list: .*/longest: 12}/' small.yaml >long.yaml
mkdir fake
printf '#!/bin/sh\necho started >>"%s/drawing"\nsleep 20\n' "$PWD" >fake/gnuplot
chmod +x fake/gnuplot

# Starts tacet ARGUMENTS with the usual reaction to signals, which a job of a shell without a
# terminal has not, and waits for TEXT in FILE: words, or what the fake gnuplot writes.
start() # TEXT FILE ARGUMENTS..
{
    text=$1 file=$2
    shift 2
    rm -f words drawing
    : >words
    env --default-signal=INT,TERM "$TACET" "$@" >out 2>words &
    run=$!
    tries=0
    until grep -q "$text" "$file" 2>/dev/null; do
        tries=$((tries + 1))
        [ "$tries" -lt 600 ] || { complain "$*: no '$text' in $file"; break; }
        sleep 0.05
    done
}

ends() # WHAT CODE
{
    wait "$run"
    code=$?
    [ "$code" = "$2" ] || complain "$1: ends with $code, not $2: $(tail -2 words)"
}

no_rest() # WHAT FOLDER
{
    [ ! -e "$2" ] || complain "$1: leaves $2: $(ls "$2")"
}

for signal in INT:130 TERM:143; do
    name=${signal%:*} code=${signal#*:}
    # at once: the model is being prepared, or screening has just begun
    start screening words screen long.yaml -o result --drawings none
    kill -"$name" "$run"
    ends "$name at the start" "$code"
    grep -q '^tacet: stopped .*; nothing was written$' words ||
        complain "$name at the start: $(cat words)"
    no_rest "$name at the start" result
done

# this one falls into the preparing, unless this script was held up; then once more
sed 's/speeds_rpm: .*/speeds_rpm: 1000:2000:1/' small.yaml >prepare.yaml
for try in 1 2 3 4 5; do
    start screening words screen prepare.yaml -o result --drawings none
    kill -INT "$run"
    ends "while preparing" 130
    grep -q '^tacet: stopped while the model was prepared; nothing was written$' words && break
    [ "$try" != 5 ] || complain "while preparing: $(cat words)"
done
no_rest "while preparing" result

# a second one ends the run at once; nothing is left but an empty folder
start screening words screen long.yaml -o second --drawings none
kill -INT "$run"
kill -TERM "$run"
wait "$run"
code=$?
case "$code" in 130 | 143) ;; *) complain "second signal: ends with $code" ;; esac
[ ! -d second ] || [ -z "$(ls second)" ] || complain "second signal: leaves $(ls second)"

# while it waits for a study that does not come
mkfifo never
sleep 30 >never &
holder=$!
env --default-signal=INT,TERM "$TACET" screen - <never >out 2>words &
run=$!
sleep 0.5
kill -INT "$run"
ends "while waiting for the study" 130
kill "$holder"

# while a drawing hangs: the data are there, and whole
tacet screen small.yaml -o good --drawings none >/dev/null 2>&1
PATH="$PWD/fake:$PATH" start started drawing screen small.yaml -o drawn
kill -TERM "$run"
kill -TERM "$run"
ends "while drawing" 143
for file in good/*.csv good/*.txt good/*.json; do
    cmp -s "$file" "drawn/${file##*/}" || complain "while drawing: ${file##*/} is not whole"
done

# killed at once, killed while drawing: what is there is whole, and the next run clears up
PATH="$PWD/fake:$PATH" start started drawing screen small.yaml -o drawn
kill -KILL "$run"
ends "killed" 137
ls drawn/*.tmp >/dev/null 2>&1 || complain "killed: this test was to leave a part"
tacet screen small.yaml -o drawn --drawings none >out 2>words ||
    complain "after the kill: ends with $?: $(cat words)"
diff -r good drawn || complain "after the kill: files differ"
start screening words screen long.yaml -o killed --drawings none
kill -KILL "$run"
wait "$run"
tacet screen small.yaml -o killed --drawings none >out 2>words ||
    complain "after the early kill: $(cat words)"
diff -r good killed || complain "after the early kill: files differ"
finish
