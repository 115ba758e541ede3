#!/usr/bin/env bash
# Brings up a Slurm cluster of several nodes on this machine, runs an ensemble as a
# job array, kills a node on the way, and compares the result with that of one run
# without shards, byte for byte. Needs slurm-wlm and munge, and root.
set -euo pipefail
cd "$(dirname "$0")/../../.."
for tool in sbatch slurmctld slurmd munged; do
	if ! command -v $tool >/dev/null 2>&1 && [ ! -x /usr/sbin/$tool ]; then
		if [ -n "${CI:-}" ] && [ "$(id -u)" = 0 ]; then
			apt-get update -q && apt-get install -y -q --no-install-recommends slurm-wlm munge
		else
			echo "slurm: $tool is missing; install slurm-wlm and munge"
			[ -n "${CI:-}" ] && exit 1 || exit 0
		fi
	fi
done
export PATH=$PATH:/usr/sbin
R=$(mktemp -d)
H=$(hostname -s)
pids=()
stop() {
	for p in "${pids[@]}"; do kill "$p" 2>/dev/null || true; done
	sleep 1
	for p in "${pids[@]}"; do kill -9 "$p" 2>/dev/null || true; done
	rm -rf "$R"
}
trap stop EXIT
chmod 755 "$R"
mkdir -p "$R"/{munge,state,log,spool/n1,spool/n2,spool/n3,spool/n4}
chmod 711 "$R/munge"
head -c 128 /dev/urandom >"$R/munge/key"
chmod 600 "$R/munge/key"
port() { # a free one
	local p
	for p in $(shuf -i 20000-32000 -n 200); do
		if ! (exec 3<>"/dev/tcp/127.0.0.1/$p") 2>/dev/null; then echo "$p"; return; fi
	done
}
P=$(port)
N=$(shuf -i 33000-60000 -n 1)
cat >"$R/slurm.conf" <<CONF
ClusterName=ci
SlurmctldHost=$H(127.0.0.1)
SlurmUser=root
SlurmdUser=root
AuthType=auth/munge
AuthInfo=socket=$R/munge/socket
CommunicationParameters=NoInAddrAny,NoCtldInAddrAny
SlurmctldPort=$P
StateSaveLocation=$R/state
SlurmctldPidFile=$R/slurmctld.pid
SlurmdPidFile=$R/slurmd-%n.pid
SlurmdSpoolDir=$R/spool/%n
SlurmctldLogFile=$R/log/slurmctld.log
SlurmdLogFile=$R/log/slurmd-%n.log
ProctrackType=proctrack/linuxproc
TaskPlugin=task/none
JobAcctGatherType=jobacct_gather/none
AccountingStorageType=accounting_storage/none
JobCompType=jobcomp/none
MailProg=/bin/true
ReturnToService=2
SlurmdTimeout=10
SelectType=select/cons_tres
SelectTypeParameters=CR_Core
SchedulerParameters=sched_interval=1,bf_interval=1
MinJobAge=600
NodeName=n[1-4] NodeHostname=$H NodeAddr=127.0.0.1 Port=[$N-$((N + 3))] CPUs=2 RealMemory=500 State=UNKNOWN
PartitionName=main Nodes=ALL Default=YES MaxTime=INFINITE State=UP
CONF
export SLURM_CONF=$R/slurm.conf
munged --foreground --force --key-file="$R/munge/key" --socket="$R/munge/socket" --pid-file="$R/munge/pid" --log-file="$R/munge/log" --seed-file="$R/munge/seed" >/dev/null 2>&1 &
pids+=($!)
for _ in $(seq 50); do [ -S "$R/munge/socket" ] && break; sleep 0.1; done
slurmctld -D -c -f "$R/slurm.conf" >/dev/null 2>&1 &
pids+=($!)
declare -A node
for n in n1 n2 n3 n4; do
	slurmd -D -N $n -f "$R/slurm.conf" >/dev/null 2>&1 &
	node[$n]=$!
	pids+=($!)
done
for _ in $(seq 100); do [ "$(sinfo -h -t idle -o %D 2>/dev/null | paste -sd+ | bc 2>/dev/null || true)" = 4 ] && break; sleep 0.2; done
sinfo -h -o '%D %t'

go build -o "$R/cycle" ./cmd/cycle
members=${MEMBERS:-600}
# The array needs the shared memory of no more than one task a core here.
args=(ensemble earth_uncertain --members "$members" --seed 2)
"$R/cycle" "${args[@]}" --out "$R/whole" --quiet
"$R/cycle" "${args[@]}" --out "$R/parts" --slurm 12 --submit | tee "$R/submitted"
array=$(sed -n 's/.*jobs \([0-9]*\) and.*/\1/p' "$R/submitted")

# When some shards run, a node dies with kill -9; its tasks go on as orphans while
# their shards are queued again, or, below, submitted again.
for _ in $(seq 100); do [ "$(squeue -h -j "$array" -t R | wc -l)" -ge 3 ] && break; sleep 0.1; done
victim=$(squeue -h -j "$array" -t R -o %N | head -1)
echo "killing node ${victim:-n1}"
kill -9 "${node[${victim:-n1}]}"
for i in $(seq 120); do
	left=0
	for s in $(seq 12); do [ -e "$R/parts/$(printf 'shard-%05d-of-00012.part' "$s")" ] || left=$((left + 1)); done
	[ -e "$R/parts/members.parquet" ] && left=0
	[ $left = 0 ] && break
	sleep 0.5
	# Slurm lets a requeued task wait; after some seconds submit what is missing again.
	if [ "$i" = 60 ]; then
		for s in $(seq 12); do
			[ -e "$R/parts/$(printf 'shard-%05d-of-00012.part' "$s")" ] || sbatch --parsable --array="$s" "$R/parts/job.sh" --chdir="$R/parts" >/dev/null || true
		done
	fi
done
[ $left = 0 ] || { echo "slurm: $left shards are missing"; squeue; tail -5 "$R"/parts/slurm-*.out "$R"/log/*; exit 1; }
# The joining job may have been given up with the array's dead node: it is a plain command.
for _ in $(seq 10); do [ -e "$R/parts/report.html" ] && break; sleep 0.5; done
"$R/cycle" gather "$R/parts" --quiet
cmp "$R/whole/members.parquet" "$R/parts/members.parquet"
cmp "$R/whole/summary.json" "$R/parts/summary.json"
echo "slurm: $members members in 12 shards on 4 nodes, one killed: the same bytes"
echo "1 passed, 0 failed"
