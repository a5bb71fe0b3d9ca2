//! A small in-tree fuzzer: mutates a kept corpus for a given time and holds every reader, and the whole of `post`, to
//! more than not panicking.
//!
//! `cargo run --release --example fuzz -- [TARGET or all] [SECONDS] [SEED]`. A failing input is written to
//! `fuzz/found/`, printed as a Rust literal for a regression test, and makes the exit status 1.

#![allow(clippy::print_stdout, clippy::print_stderr, reason = "a fuzzer tells what it does")]

mod mutate;
mod targets;

use std::fs;
use std::panic::{self, AssertUnwindSafe};
use std::path::{Path, PathBuf};
use std::process::exit;
use std::sync::{Arc, Mutex};
use std::thread;
use std::time::{Duration, Instant};

use mutate::{Mutator, Random};
use targets::{TARGETS, Target};

/// No input of the size made here may take longer.
const LONGEST: Duration = Duration::from_secs(20);

/// The input at work, its target, and when it was begun.
type AtWork = Arc<Mutex<(&'static str, Vec<u8>, Instant)>>;

fn main() {
    let typed: Vec<String> = std::env::args().skip(1).collect();
    let wanted = typed.first().map_or("all", String::as_str);
    let seconds: u64 = typed.get(1).map_or(30, |text| text.parse().expect("seconds are a whole number"));
    let seed: u64 = typed.get(2).map_or(1, |text| text.parse().expect("the seed is a whole number"));
    let chosen: Vec<&Target> = TARGETS.iter().filter(|t| wanted == "all" || t.name == wanted).collect();
    if chosen.is_empty() {
        eprintln!("there is no target {wanted}; all, or one of: {}", TARGETS.map(|t| t.name).join(", "));
        exit(2);
    }
    panic::set_hook(Box::new(|_| {}));
    let at_work: AtWork = Arc::new(Mutex::new(("", Vec::new(), Instant::now())));
    let watched = Arc::clone(&at_work);
    thread::spawn(move || watch(&watched));
    for target in chosen {
        fuzz(target, Duration::from_secs(seconds), seed, &at_work);
    }
    println!(
        "peak memory {} MiB",
        peak_memory_kib().map_or("unknown".into(), |kib| (kib / 1024).to_string())
    );
}

/// Mutates the target's corpus until the time is up; ends the process at the first failure.
fn fuzz(target: &'static Target, time: Duration, seed: u64, at_work: &AtWork) {
    let corpus = corpus(target);
    let mut mutator = Mutator::new(Random::new(seed), corpus);
    let (begun, mut runs, mut accepted) = (Instant::now(), 0_u64, 0_u64);
    while begun.elapsed() < time {
        let input = mutator.next_input(runs);
        *at_work.lock().expect("no panic while held") = (target.name, input.clone(), Instant::now());
        match panic::catch_unwind(AssertUnwindSafe(|| (target.run)(&input))) {
            Ok(Ok(was_accepted)) => accepted += u64::from(was_accepted),
            Ok(Err(why)) => fail(target.name, &input, &why),
            Err(cause) => fail(target.name, &input, &panic_text(cause.as_ref())),
        }
        runs += 1;
    }
    *at_work.lock().expect("no panic while held") = ("", Vec::new(), Instant::now());
    println!("{:8} {runs} inputs, {accepted} of them accepted, seed {seed}: nothing found", target.name);
}

/// The kept inputs of a target: those of its own folder and those it names elsewhere in the repository.
fn corpus(target: &Target) -> Vec<Vec<u8>> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let mut files: Vec<PathBuf> = fs::read_dir(root.join("fuzz/corpus").join(target.name))
        .map(|entries| entries.filter_map(|entry| Some(entry.ok()?.path())).collect())
        .unwrap_or_default();
    files.extend(target.also.iter().map(|name| root.join(name)));
    files.sort();
    files
        .iter()
        .map(|file| fs::read(file).unwrap_or_else(|why| panic!("{}: {why}", file.display())))
        .collect()
}

/// Ends the process when an input takes too long.
fn watch(at_work: &AtWork) {
    loop {
        thread::sleep(Duration::from_millis(500));
        let (name, input, begun) = at_work.lock().expect("no panic while held").clone();
        if !name.is_empty() && begun.elapsed() > LONGEST {
            fail(name, &input, "it takes too long");
        }
    }
}

fn fail(name: &str, input: &[u8], why: &str) -> ! {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("fuzz/found");
    let file = folder.join(format!("{name}-{:016x}", mutate::digest(input)));
    let kept = fs::create_dir_all(&folder).and_then(|()| fs::write(&file, input));
    println!("{name}: {why}\n  b\"{}\"", input.escape_ascii());
    println!("  {} {}", if kept.is_ok() { "kept as" } else { "could not be kept as" }, file.display());
    exit(1)
}

fn panic_text(cause: &(dyn std::any::Any + Send)) -> String {
    let text = cause.downcast_ref::<String>().cloned();
    let text = text.or_else(|| cause.downcast_ref::<&str>().map(|text| (*text).to_owned()));
    format!("panic: {}", text.unwrap_or_default())
}

/// The most memory the process has held, where the system tells.
fn peak_memory_kib() -> Option<u64> {
    let status = fs::read_to_string("/proc/self/status").ok()?;
    status.lines().find_map(|line| line.strip_prefix("VmHWM:"))?.trim().trim_end_matches(" kB").parse().ok()
}
