#!/bin/sh
# Compares package ode with CVODE in one run.
#
#	ode/peer/run.sh [native] [options of the Go program, e.g. -v -only hires]
#
# The peer is built against the distribution's SUNDIALS, installed with apt if
# it is missing. With "native" SUNDIALS is compiled from the distribution's
# source package with -O3 for this processor and linked statically, which is
# about three times as fast and the more honest peer. Everything is built in
# ${TMPDIR:-/tmp}/ode-peer.
set -e
here=$(cd "$(dirname "$0")" && pwd)
work=${TMPDIR:-/tmp}/ode-peer
mkdir -p "$work"
cflags="-O3 -march=native"
names="cvode nvecserial sunlinsolband sunlinsoldense sunmatrixband sunmatrixdense"

if [ "$1" = native ]; then
	shift
	prefix=$work/native
	if [ ! -f "$prefix/lib/libsundials_cvode.a" ]; then
		mkdir -p "$work/parts" "$work/lists/partial"
		for f in /etc/apt/sources.list.d/*.sources; do
			sed 's/^Types: deb$/Types: deb-src/' "$f" >"$work/parts/$(basename "$f")"
		done
		opts="-o Dir::Etc::sourcelist=/dev/null -o Dir::Etc::sourceparts=$work/parts -o Dir::State::lists=$work/lists"
		(cd "$work" && apt-get $opts update && apt-get $opts source --download-only sundials && tar xf sundials_*.orig.tar.*)
		src=$(ls -d "$work"/sundials-*/ | head -1)
		cmake -S "$src" -B "$work/build" -DCMAKE_BUILD_TYPE=Release "-DCMAKE_C_FLAGS=$cflags" \
			-DBUILD_SHARED_LIBS=OFF -DBUILD_STATIC_LIBS=ON -DEXAMPLES_ENABLE_C=OFF -DEXAMPLES_INSTALL=OFF \
			-DBUILD_ARKODE=OFF -DBUILD_CVODES=OFF -DBUILD_IDA=OFF -DBUILD_IDAS=OFF -DBUILD_KINSOL=OFF \
			-DCMAKE_INSTALL_PREFIX="$prefix"
		cmake --build "$work/build" --target install
	fi
	libs=
	for n in $names generic; do libs="$libs $prefix/lib/libsundials_$n.a"; done
	cc $cflags -I"$prefix/include" -o "$work/peer" "$here/cvode/peer.c" $libs -lm
else
	if [ ! -f /usr/include/cvode/cvode.h ]; then
		apt-get update && apt-get install -y libsundials-dev
	fi
	libs=
	for n in $names; do libs="$libs -lsundials_$n"; done
	cc $cflags -o "$work/peer" "$here/cvode/peer.c" $libs -lm
fi
cd "$here" && go build -o "$work/compare" . && exec "$work/compare" -bin "$work/peer" "$@"
