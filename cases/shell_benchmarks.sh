#!/usr/bin/env bash
# How well shells absorb: runs the scenes of cases/shell_benchmarks/ behind shells of several kinds and thicknesses and
# compares each with a reference that has (next to) no shell error. Writes, per scene, the comparison as text and CSV and
# pictures of the error against time, and one summary. Needs the built program; pictures need gnuplot-nox.
#   bash cases/shell_benchmarks.sh [--out FOLDER] [--scenes "square box ..."] [--kinds "moebius ..."] [--cells "5 8 ..."]
#                                  [--large] [--single] [--program PATH]
#   --scenes   square, plate, box, long_box, ground, slab, sphere, charge, long_run; default: square box ground
#   --kinds    moebius, cfs_searched, cfs_m3, cfs_m4, cfs_plate, matched_slab; default: all
#   --cells    of the shell; default: 5 8 10 16
#   --large    compare box and sphere with lattices so large that nothing returns: 3 GB, some ten minutes each on two cores
#   --single   the shells in single precision; the references stay double
# References: square (and box and sphere with --large) against a lattice so large that nothing returns before the end; the
# others against the scene's witness, whose predicted floor stands in SCENE_witness.txt. The summary says which.
set -euo pipefail
root=$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd)
out=$root/build/shell_benchmarks
program=$root/build/wanewall
scenes="square box ground"
kinds="moebius cfs_searched cfs_m3 cfs_m4 cfs_plate matched_slab"
cells="5 8 10 16"
large=no
single=no
while [ $# -gt 0 ]; do
  case $1 in
    --out) out=$2; shift 2 ;;
    --scenes) scenes=$2; shift 2 ;;
    --kinds) kinds=$2; shift 2 ;;
    --cells) cells=$2; shift 2 ;;
    --program) program=$2; shift 2 ;;
    --large) large=yes; shift ;;
    --single) single=yes; shift ;;
    *) echo "$1 is no option of this script; its first lines name all" >&2; exit 2 ;;
  esac
done
[ -x "$program" ] || { echo "$program is missing; build it first: bash cases/first_run.sh" >&2; exit 1; }
pictures=yes
command -v gnuplot >/dev/null || { pictures=no; echo "No pictures without gnuplot: sudo apt install gnuplot-nox" >&2; }
mkdir -p "$out"
cd "$out"
# Small runs: one thread each, as many side by side as there are processors.
jobs=$(nproc)

# The shell of a kind with N cells, to stand in place of {cells: 10}. Cells are 1 mm; sigma_opt = 0.8 (m + 1)/(eta0 d).
shell_of() {
  case $1 in
    moebius) echo "{kind: moebius, cells: $2}" ;;
    cfs_searched) echo "{kind: cfs_pml, cells: $2}" ;;
    cfs_m3) echo "{kind: cfs_pml, cells: $2, order: 3, sigma_max: 8.4941 S/m, kappa_max: 1, alpha_max: 0 S/m}" ;;
    cfs_m4) echo "{kind: cfs_pml, cells: $2, order: 4, sigma_max: 10.6177 S/m, kappa_max: 1, alpha_max: 0 S/m}" ;;
    # The set for the plate: kappa 15, alpha 0.24 S/m, 0.75 sigma_opt (from memory: Roden and Gedney 2000).
    cfs_plate) echo "{kind: cfs_pml, cells: $2, order: 3, sigma_max: 6.3706 S/m, kappa_max: 15, alpha_max: 0.24 S/m}" ;;
    matched_slab) echo "{kind: matched_slab, cells: $2, order: 3}" ;;
    *) echo "$1 is no kind; the first lines of this script name all" >&2; return 1 ;;
  esac
}

# Where nothing returns before the end: at least half as many cells more on each side as the run has steps.
large_volume_of() {
  case $1 in
    square) echo "{x: [0 mm, 1 mm], y: [-301 mm, 341 mm], z: [-301 mm, 341 mm]}" ;;
    # 600 steps last 343 cells at the speed of light, 500 steps 286.
    box) echo "{x: [-176 mm, 200 mm], y: [-176 mm, 200 mm], z: [-176 mm, 200 mm]}" ;;
    sphere) echo "{x: [-146 mm, 176 mm], y: [-146 mm, 166 mm], z: [-146 mm, 162 mm]}" ;;
  esac
}

# variant SCENE SHELL FILE [CLEAR_VOLUME]
variant() {
  local text
  text=$(cat "$root/cases/shell_benchmarks/$1.yaml")
  [ -z "${4:-}" ] || text=$(sed "s|^clear_volume:.*|clear_volume: $4|" <<<"$text")
  echo "${text//'{cells: 10}'/$2}" >"$3"
}

run() { # run NAME [OPTIONS]: one thread, told to a log
  local name=$1
  shift
  OMP_WAIT_POLICY=passive "$program" run "$name.yaml" --record "$name.h5" --force "$@" >"$name.log" 2>&1 ||
    { echo "== $name failed:" >&2; tail -5 "$name.log" >&2; return 1; }
}
export -f run
export program

reference_of() { # makes SCENE_reference.h5 and says what it is
  local scene=$1
  if [ "$scene" = square ] || { [ -n "$(large_volume_of "$scene")" ] && [ "$large" = yes ]; }; then
    variant "$scene" "{kind: electric_wall}" "${scene}_reference.yaml" "$(large_volume_of "$scene")"
    run "${scene}_reference" >&2
    echo "large lattice"
  else
    variant "$scene" "$(shell_of cfs_m4 10)" "${scene}_reference_run.yaml"
    run "${scene}_reference_run" --witness >&2
    mv "${scene}_reference_run_witness.h5" "${scene}_reference.h5"
    sed -n '/^## What the shell changed/,$p' "${scene}_reference_run.log" >"${scene}_witness.txt"
    echo "witness of $(sed -n 's/.*layers of \(.*\), \(.*\)\.$/\2 \1/p' "${scene}_witness.txt")"
  fi
}

# Of a comparison's CSV: record, worst peak error of E, worst error of E in the band. Records are named SCENE_KIND_N.h5.
summary_of() { # SCENE REFERENCE CSV
  awk -F, -v scene="$1" -v reference="$2" 'NR > 1 && $6 == "E" && $11 != "" {
      name = $1; sub(/\.h5$/, "", name); sub("^" scene "_", "", name)
      kind = name; sub(/_[0-9]+$/, "", kind); n = name; sub(/.*_/, "", n)
      if (!(name in peak)) { order[++count] = name; kinds[name] = kind; cells[name] = n; peak[name] = -999; band[name] = -999 }
      if ($11 + 0 > peak[name] && $11 != "equal") { peak[name] = $11 + 0; where[name] = $2 }
      if ($14 + 0 > band[name] && $14 != "equal") { band[name] = $14 + 0; at[name] = $13 / 1e9 }
    }
    END { for (i = 1; i <= count; ++i) { name = order[i]
      printf "%s,%s,%s,%s,%.1f,%s,%.1f,%.3g\n", scene, reference, kinds[name], cells[name], peak[name], where[name], band[name], at[name] } }' "$3"
}

echo "scene,reference,kind,cells,worst peak error [dB],at point,worst error in the band [dB],at [GHz]" >summary.csv
for scene in $scenes; do
  names=()
  for kind in $kinds; do
    for n in $cells; do
      name=${scene}_${kind}_$n
      variant "$scene" "$(shell_of "$kind" "$n")" "$name.yaml"
      [ "$single" = no ] || sed -i 's/^precision: double/precision: single/' "$name.yaml"
      names+=("$name")
    done
  done
  echo "== $scene: ${#names[@]} runs"
  [ "$scene" = long_run ] || reference=$(reference_of "$scene")
  printf '%s\n' "${names[@]}" | xargs -P "$jobs" -I{} bash -c 'run {} --threads 1'
  if [ "$scene" = long_run ]; then
    # The energy over its largest value, at the tenths of the run: it may not rise at the end.
    for name in "${names[@]}"; do
      echo "$name: $(sed -n 's/.*step \([0-9]*\) of.*energy \(.*\) dB.*/\1 \2/p' "$name.log" |
        awk '{ printf "%s%s: %s dB", (NR > 1 ? ", " : ""), $1, $2 }')"
    done | tee long_run.txt
    continue
  fi
  "$program" compare "${scene}_reference.h5" "${names[@]/%/.h5}" --csv "$scene.csv" >"$scene.txt"
  summary_of "$scene" "$reference" "$scene.csv" >>summary.csv
  [ "$pictures" = yes ] || continue
  middle=$(echo "$cells" | tr ' ' '\n' | grep -x 10 || echo "${cells%% *}")
  same_cells=()
  for kind in $kinds; do same_cells+=("${scene}_${kind}_$middle.h5"); done
  "$program" compare "${scene}_reference.h5" "${same_cells[@]}" --picture "${scene}_kinds_$middle.svg" >/dev/null
  first=${kinds%% *}
  same_kind=()
  for n in $cells; do same_kind+=("${scene}_${first}_$n.h5"); done
  "$program" compare "${scene}_reference.h5" "${same_kind[@]}" --picture "${scene}_${first}.svg" >/dev/null
done

# The summary for people: one line per scene and kind, one column per number of cells; peak and band errors.
awk -F, -v cells="$cells" 'NR > 1 {
    key = sprintf("%-10s %-14s", $1, $3)
    if (!(key in seen)) { seen[key] = 1; order[++count] = key; reference[$1] = $2 }
    peak[key, $4] = $5; band[key, $4] = $7
  }
  END {
    n = split(cells, list, " ")
    printf "Worst error of E over all points: peak in time / worst in the band [dB]\n\n%-25s", "cells"
    for (i = 1; i <= n; ++i) printf " %16s", list[i]
    print ""
    for (k = 1; k <= count; ++k) {
      printf "%-25s", order[k]
      for (i = 1; i <= n; ++i) printf " %7.1f /%7.1f", peak[order[k], list[i]], band[order[k], list[i]]
      print ""
    }
    print "\nReferences:"
    for (scene in reference) printf "  %s: %s\n", scene, reference[scene]
  }' summary.csv | tee summary.txt
echo
echo "In $out: summary.txt, summary.csv, and per scene tables (.txt, .csv) and pictures (.svg)"
