//! Lays out the memory of the machine the image is for, and brings in the constants of the scenario it runs.
use std::{env, fs, path::PathBuf};

/// Machine, flash and RAM: origin and length.
const MACHINES: [(&str, [&str; 4]); 1] = [("microbit", ["0x00000000", "256K", "0x20000000", "16K"])];

fn main() {
    println!("cargo:rerun-if-changed=build.rs");
    let out = PathBuf::from(env::var_os("OUT_DIR").expect("cargo sets OUT_DIR"));

    let machine = variable("PHASE4_MACHINE", "the machine the image is for, such as microbit");
    let Some((_, [flash, flash_length, ram, ram_length])) = MACHINES.into_iter().find(|(name, _)| *name == machine) else {
        panic!("no memory layout for machine {machine} in build.rs");
    };
    let layout = format!(
        "MEMORY {{\n  FLASH : ORIGIN = {flash}, LENGTH = {flash_length}\n  RAM : ORIGIN = {ram}, LENGTH = {ram_length}\n}}\n"
    );
    fs::write(out.join("memory.x"), layout).expect("OUT_DIR can be written to");
    println!("cargo:rustc-link-search={}", out.display());
    println!("cargo:rustc-link-arg-bins=-Tlink.x");
    println!("cargo:rustc-link-arg-bins=--nmagic");

    let constants = variable("PHASE4_CONSTANTS", "the file that the host's example `image_constants` wrote");
    println!("cargo:rerun-if-changed={constants}");
    fs::copy(&constants, out.join("constants.rs")).unwrap_or_else(|error| panic!("{constants}: {error}"));
}

fn variable(name: &str, what: &str) -> String {
    println!("cargo:rerun-if-env-changed={name}");
    env::var(name).unwrap_or_else(|_| panic!("{name} is not set: {what}. `examples/firmware/check` sets it"))
}
