# What the scripts of this folder share: a scratch folder with the studies, the program as `tacet`,
# complaints that are counted. Read by each of them; the script's first argument is the program.
set -u
here=$(cd "$(dirname "$0")" && pwd)
root=$(cd "$here/../.." && pwd)
TACET=$(realpath "$1")
scratch=$(mktemp -d)
trap 'rm -rf "$scratch"' EXIT
mkdir "$scratch/bin" "$scratch/desk"
ln -s "$TACET" "$scratch/bin/tacet"
cp "$here"/studies/* "$scratch/desk/"
PATH="$scratch/bin:$PATH"
LC_ALL=C
TERM=dumb
export PATH LC_ALL TERM TACET
unset NO_COLOR POSIXLY_CORRECT 2>/dev/null
cd "$scratch/desk" || exit 1
wrong=0

complain() # WORDS..
{
    echo "WRONG: $*"
    wrong=$((wrong + 1))
}

finish() # last line of a script
{
    [ "$wrong" = 0 ] || { echo "$wrong wrong"; exit 1; }
    exit 0
}
