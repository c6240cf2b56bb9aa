# Sourced by tests/run after deploy/setup.sh. Fetches published test data into
# .cache/test-data: from Debian's packages without installing them, and from feedparser's
# source distribution. What cannot be had is noted in one line, and its tests are skipped.
# shellcheck shell=sh

data="$root/.cache/test-data"

# download_debian PACKAGE: put its .deb into the current folder. Package lists that are missing
# or out of date are renewed once, which only root can do.
download_debian() {
    command -v apt-get >/dev/null && command -v dpkg-deb >/dev/null || return 1
    # Root's apt would hand over to a user who may not write here.
    apt-get -qq -o APT::Sandbox::User="$(id -un)" download "$1" >/dev/null 2>&1 && return 0
    [ "$(id -u)" -eq 0 ] && apt-get -qq update >/dev/null 2>&1 || return 1
    apt-get -qq -o APT::Sandbox::User="$(id -un)" download "$1" >/dev/null 2>&1
}

# unpack_debian PACKAGE FOLDER NAME FILES...: put files of a package's folder (all of it where
# none is named) into the test data under NAME, whole or not at all.
unpack_debian() (
    package=$1 folder=$2 name=$3
    shift 3
    mkdir -p "$data" && work=$(mktemp -d "$data/fetching.XXXXXX") || exit 1
    trap 'rm -rf "$work"' EXIT
    cd "$work" && download_debian "$package" && dpkg-deb -x ./*.deb unpacked || exit 1
    mkdir new || exit 1
    if [ $# -eq 0 ]; then
        cp -R "unpacked/$folder/." new/ || exit 1
    fi
    for file in "$@"; do
        cp "unpacked/$folder/$file" new/ || exit 1
    done
    rm -rf "${data:?}/$name" && mv new "$data/$name"
)

fetch_unicode() {
    [ -f "$data/unicode/WordBreakTest.txt" ] && [ -f "$data/unicode/Scripts.txt" ] ||
        unpack_debian unicode-data usr/share/unicode unicode \
            auxiliary/WordBreakTest.txt Scripts.txt DerivedNormalizationProps.txt
}

fetch_tm() {
    [ -d "$data/tm/acq" ] || unpack_debian r-cran-tm usr/lib/R/site-library/tm/texts tm
}

# fetch_feedparser: its source distribution in the pinned version, without the top folder.
fetch_feedparser() (
    version=$(sed -n 's/^feedparser==//p' "$root/deploy/constraints.txt")
    grep -qx "Version: $version" "$data/feedparser/PKG-INFO" 2>/dev/null && exit 0
    mkdir -p "$data" && work=$(mktemp -d "$data/fetching.XXXXXX") || exit 1
    trap 'rm -rf "$work"' EXIT
    cd "$work" || exit 1
    # Of this package alone: with :all: pip would build the build tools from their sources too.
    "$venv/bin/python" -m pip --quiet --disable-pip-version-check download --no-deps \
        --no-binary feedparser "feedparser==$version" >/dev/null 2>&1 || exit 1
    "$venv/bin/python" -m tarfile -e "feedparser-$version.tar.gz" unpacked || exit 1
    rm -rf "$data/feedparser" && mv "unpacked/feedparser-$version" "$data/feedparser"
)

# fetch_test_data: fetch all that is not there yet. Where CI is "true" nothing may be absent.
fetch_test_data() {
    absent=
    fetch_unicode || absent="$absent unicode (Debian package unicode-data);"
    fetch_tm || absent="$absent tm (Debian package r-cran-tm);"
    fetch_feedparser || absent="$absent feedparser (source distribution from the package index);"
    VANNER_TEST_DATA=$data
    export VANNER_TEST_DATA
    [ -n "$absent" ] || return 0
    if [ "${CI:-}" = true ]; then
        say "Test data could not be fetched, which is an error where CI=true:$absent"
        return 1
    fi
    say "Test data could not be fetched, so the tests that need it are skipped:$absent"
}
