#!/usr/bin/env bash
# The farm for real: Slurm on loopback (its own munged, slurmctld and slurmd in a temporary folder), an array of parts
# and the join that waits for it, as configs/slurm/ has them; the front is compared byte for byte with an unbroken run.
# Wants root, for Debian's slurm-wlm and munge and for running them; leaves no daemon behind.
set -euo pipefail
cd "$(dirname "$0")/../.."
readonly STUDY=$PWD/configs/studies/quick.toml
# One more than the study has cells: the last part is empty.
readonly PARTS=5
# Hang guards, seconds.
readonly LONGEST_START=60 LONGEST_RUN=300

PATH=$PATH:/usr/sbin
if ! type sbatch slurmctld slurmd munged >/dev/null 2>&1; then
    apt-get update -qq
    DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends slurm-wlm munge
fi
# The program as tests of it are built, which is there already when they ran; another build would have other features.
cargo test --locked --quiet --no-run --test kill
export WIDEFRONT=${CARGO_TARGET_DIR:-$PWD/target}/debug/widefront

farm=$(mktemp -d)
# slurmd wants its folders open to read, munged its own closed to write.
chmod 755 "$farm"
daemons=()
jobs=()
finish() {
    local code=$?
    trap - EXIT INT TERM
    if ((${#jobs[@]} && code)); then
        # Their processes are no children of this script.
        timeout 10 scancel --signal=KILL --full "${jobs[@]}" || true
        timeout 10 scancel "${jobs[@]}" || true
        sleep 1
    fi
    if ((${#daemons[@]})); then
        kill "${daemons[@]}" 2>/dev/null || true
        for ((i = 0; i < 50; i++)); do
            kill -0 "${daemons[@]}" 2>/dev/null || break
            sleep 0.1
        done
        kill -KILL "${daemons[@]}" 2>/dev/null || true
        wait
    fi
    if ((code)); then
        echo "tests/farm/check.sh: failed; what the daemons and jobs said:" >&2
        tail -n 40 "$farm"/*.log >&2 || true
    fi
    rm -rf "$farm"
    exit "$code"
}
trap finish EXIT
trap 'exit 130' INT
trap 'exit 143' TERM

# Two ports that nothing listens on.
free_ports() {
    local port found=()
    while ((${#found[@]} < 2)); do
        port=$((20000 + RANDOM % 10000))
        (exec 3<>"/dev/tcp/127.0.0.1/$port") 2>/dev/null || found+=("$port")
    done
    echo "${found[@]}"
}
read -r control_port node_port < <(free_ports)
mkdir "$farm"/{munge,state,spool}
head -c 1024 /dev/urandom >"$farm/munge/key"
chmod 600 "$farm/munge/key"
cat >"$farm/slurm.conf" <<CONF
ClusterName=loopback
SlurmctldHost=$(hostname -s)(127.0.0.1)
SlurmctldPort=$control_port
SlurmdPort=$node_port
SlurmUser=root
SlurmdUser=root
AuthType=auth/munge
AuthInfo=socket=$farm/munge/socket
CryptoType=crypto/munge
ProctrackType=proctrack/linuxproc
TaskPlugin=task/none
SelectType=select/cons_tres
SelectTypeParameters=CR_Core
JobAcctGatherType=jobacct_gather/none
AccountingStorageType=accounting_storage/none
MpiDefault=none
ReturnToService=2
# A short wait between a job's end and the start of what depends on it.
SchedulerParameters=sched_interval=2,defer
StateSaveLocation=$farm/state
SlurmdSpoolDir=$farm/spool
SlurmctldPidFile=$farm/slurmctld.pid
SlurmdPidFile=$farm/slurmd.pid
SlurmdParameters=config_overrides
NodeName=loop NodeHostname=$(hostname -s) NodeAddr=127.0.0.1 CPUs=2 RealMemory=1000
PartitionName=all Nodes=loop Default=YES
CONF
export SLURM_CONF=$farm/slurm.conf

munged --foreground --force --num-threads=2 --key-file="$farm/munge/key" --socket="$farm/munge/socket" \
    --pid-file="$farm/munge/pid" --seed-file="$farm/munge/seed" --log-file="$farm/munged.log" \
    >"$farm/munged-output.log" 2>&1 &
daemons+=($!)
slurmctld -D -i >"$farm/slurmctld.log" 2>&1 &
daemons+=($!)
slurmd -D -N loop >"$farm/slurmd.log" 2>&1 &
daemons+=($!)

began=$SECONDS
until [ "$(sinfo --noheader --format=%T 2>/dev/null)" = idle ]; do
    if ((SECONDS - began > LONGEST_START)); then
        echo "the node is not idle after $LONGEST_START s: $(sinfo 2>&1)" >&2
        exit 1
    fi
    sleep 0.2
done
echo "farm: up after $((SECONDS - began)) s"

"$WIDEFRONT" search "$STUDY" --quiet --out "$farm/unbroken" >/dev/null
submit() {
    local script=configs/slurm/$1.sbatch arguments=("$farm/run" "$PARTS")
    [ "$1" = join ] || arguments=("$STUDY" "${arguments[@]}")
    shift
    sbatch --parsable --chdir="$farm" "$@" "$script" "${arguments[@]}"
}
array=$(submit search --array="1-$PARTS")
jobs+=("$array")
# A task sent again goes on from what is there.
again=$(submit search --array=2 --dependency="afterok:$array" --kill-on-invalid-dep=yes)
jobs+=("$again")
joining=$(submit join --dependency="afterok:$array:$again" --kill-on-invalid-dep=yes)
jobs+=("$joining")
began=$SECONDS
while [ -n "$(squeue --noheader --jobs="$array,$again,$joining" 2>/dev/null)" ]; do
    if ((SECONDS - began > LONGEST_RUN)); then
        echo "the jobs have not ended after $LONGEST_RUN s:" >&2
        squeue >&2
        exit 1
    fi
    sleep 0.5
done
scontrol --oneliner show job "$joining" | grep -q "JobState=COMPLETED" || {
    echo "the join did not complete: $(scontrol --oneliner show job "$joining")" >&2
    exit 1
}
grep -q "going on: 1 of 1 cells" "$farm/widefront-${again}_2.log"
for file in front.csv cells.csv; do
    cmp "$farm/unbroken/$file" "$farm/run/$file"
done
echo "farm: $PARTS parts and their join took $((SECONDS - began)) s; front.csv and cells.csv are those of the unbroken run"
