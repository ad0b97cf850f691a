# Sourced by the checks: the cores an image can be built for, and how to build for them.
#
# Two routes, one project. With the target installed by rustup (`rustup target add thumbv6m-none-eabi`), plain cargo. Else a
# compiler from Debian that brings the sources of `core` and builds them: packages rustc-web, cargo-web, rust-web-src, lld.
# Either way the link arguments come from the crates' build scripts, never from a file that a normal user's cargo reads.

# Sets target, machine (of the emulator) and emulator for a core's name.
core_named() {
    emulator=qemu-system-arm
    case $1 in
    M0) target=thumbv6m-none-eabi machine=microbit ;; # 256 KiB flash, 16 KiB RAM
    *) die "no core '$1' here; there is: M0" ;;
    esac
}

die() {
    echo "${0##*/}: $*" >&2
    exit 2
}

# Dies unless the command is there; the second argument says where to get it.
need() {
    command -v "$1" >/dev/null || die "'$1' is missing: $2"
}

debian_route="on Debian 12 also 'apt-get install rustc-web cargo-web rust-web-src lld'"

# Sets route to rustup or debian, or dies and says what is missing for target $target.
choose_route() {
    if command -v rustc >/dev/null && [ -d "$(rustc --print sysroot)/lib/rustlib/$target/lib" ]; then
        need cargo "install Rust with rustup"
        route=rustup
    elif [ -x /usr/bin/rustc ] && [ -x /usr/bin/cargo ] && [ -d "$(/usr/bin/rustc --print sysroot)/lib/rustlib/src/rust/library/core" ]; then
        need ld.lld "apt-get install lld"
        route=debian
    else
        die "no compiler for $target: 'rustup target add $target', or $debian_route"
    fi
}

# cargo for target $target by route $route.
bare_cargo() {
    if [ "$route" = rustup ]; then
        cargo "$@" --target "$target"
    else
        local linker
        linker=CARGO_TARGET_$(echo "$target" | tr 'a-z.-' 'A-Z__')_LINKER
        env RUSTC_BOOTSTRAP=1 PATH="/usr/bin:$PATH" RUSTC=/usr/bin/rustc RUSTDOC=/usr/bin/rustdoc "$linker=ld.lld" \
            /usr/bin/cargo "$@" --target "$target" -Z build-std=core
    fi
}

# Finds lld, which the rustup toolchain brings along under another name; sets lld.
find_lld() {
    local sysroot host
    sysroot=$(rustc --print sysroot 2>/dev/null) || sysroot=
    host=$(rustc -vV 2>/dev/null | sed -n 's/^host: //p') || host=
    if command -v ld.lld >/dev/null; then
        lld=(ld.lld)
    elif [ -x "$sysroot/lib/rustlib/$host/bin/rust-lld" ]; then
        lld=("$sysroot/lib/rustlib/$host/bin/rust-lld" -flavor gnu)
    else
        die "'ld.lld' is missing: apt-get install lld"
    fi
}

# Prints the first of these commands that there is.
first_of() {
    local name
    for name in "$@"; do
        if command -v "$name" >/dev/null; then echo "$name" && return; fi
    done
    die "none of these commands is there: $*; apt-get install binutils-arm-none-eabi, or rustup component add llvm-tools"
}
