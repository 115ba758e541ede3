#!/bin/sh
# Builds echarts.js.gz and fetches the licences of what is in it. Needs node and
# npm; the program and its tests do not. Run it when a version below changes,
# then put the two sums it prints into assets_test.go.
set -eu
here=$(cd "$(dirname "$0")" && pwd)
tmp=$(mktemp -d)
trap 'rm -rf "$tmp"' EXIT
cp "$here/entry.js" "$tmp/"
cd "$tmp"
npm init -y >/dev/null
npm install --ignore-scripts --no-audit --no-fund --silent echarts@6.1.0 zrender@6.1.0 tslib@2.3.0 esbuild@0.28.2
banner='/* Apache ECharts 6.1.0, Licensed to the Apache Software Foundation (ASF) under the Apache License, Version 2.0; a build of some of its parts, with zrender 6.1.0 (BSD-3-Clause), parts of d3 (BSD-3-Clause) and tslib 2.3.0 (0BSD). The texts are in the section on licences. */'
npx esbuild entry.js --bundle --minify --format=iife --global-name=echarts --legal-comments=none --charset=ascii --log-level=warning --banner:js="$banner" --outfile=echarts.js
if grep -q 'new Function\|eval(\|</script' echarts.js; then
	echo "build.sh: the build would break the content security policy" >&2
	exit 1
fi
gzip -9nc echarts.js >"$here/echarts.js.gz"
mkdir -p "$here/licences"
cp node_modules/echarts/LICENSE "$here/licences/echarts.txt"
cp node_modules/echarts/NOTICE "$here/licences/echarts-notice.txt"
cp node_modules/echarts/licenses/LICENSE-d3 "$here/licences/d3.txt"
cp node_modules/zrender/LICENSE "$here/licences/zrender.txt"
cp node_modules/tslib/LICENSE.txt "$here/licences/tslib.txt"
sha256sum "$here/echarts.js.gz" echarts.js
