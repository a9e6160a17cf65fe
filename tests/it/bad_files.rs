//! Station files that must be refused: each `tests/bad/*.toml` with what the program says of it on
//! standard error in the `.stderr` beside it, byte for byte; and hostile input, made on the spot.
//!
//! A new fault is a new `.toml`, its name the fault in words. `SNAPSHOTS=overwrite cargo test` then
//! writes what the program says of it now: read that as its user would before committing it.

use std::path::{Path, PathBuf};
use std::process::Output;
use std::time::Duration;

use snapbox::cmd::Command;
use snapbox::data::{Data, DataFormat};

const FOLDER: &str = "tests/bad";
/// Fewer files than this, and some have been lost.
const FEWEST: usize = 40;
/// Far more than any file needs, far less than a user's patience.
const LONGEST: Duration = Duration::from_secs(10);

/// `nappe check` of a file, from the root of the repository: relative names stay as they are.
fn check(program: Command, file: &Path) -> Output {
    program
        .arg("check")
        .arg(file)
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .env("NO_COLOR", "1")
        .env_remove("CLICOLOR_FORCE")
        .timeout(LONGEST)
        .output()
        .unwrap()
}

/// All names in the folder with this extension, without it, in order.
fn names(extension: &str) -> Vec<String> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join(FOLDER);
    let mut names: Vec<String> = std::fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|found| found == extension))
        .map(|path| path.file_stem().unwrap().to_str().unwrap().to_owned())
        .collect();
    names.sort_unstable();
    names
}

/// What is wrong with the answer to one file, if anything.
fn complaint(name: &str) -> Option<String> {
    let output = check(
        Command::new(env!("CARGO_BIN_EXE_nappe")),
        Path::new(&format!("{FOLDER}/{name}.toml")),
    );
    if output.status.code() != Some(2) {
        return Some(format!("{name}: {} where exit status 2 is due", output.status));
    }
    if !output.stdout.is_empty() {
        return Some(format!("{name}: a refusal belongs on standard error alone"));
    }
    let expected = Path::new(env!("CARGO_MANIFEST_DIR")).join(format!("{FOLDER}/{name}.stderr"));
    snapbox::Assert::new()
        .action_env(snapbox::assert::DEFAULT_ACTION_ENV)
        .try_eq(
            Some(&name),
            Data::text(String::from_utf8_lossy(&output.stderr).into_owned()),
            // Raw: brackets and dots mean themselves, and nothing else.
            Data::read_from(&expected, Some(DataFormat::Text)).raw(),
        )
        .err()
        .map(|difference| difference.to_string())
}

#[test]
fn each_fault_is_refused_in_the_words_committed() {
    let files = names("toml");
    let complaints: Vec<String> = files.iter().filter_map(|name| complaint(name)).collect();
    assert!(complaints.is_empty(), "{}", complaints.join("\n"));
    assert!(files.len() >= FEWEST, "only {} files in {FOLDER}", files.len());
    assert_eq!(files, names("stderr"), "a file without its words, or words without their file");
}

/// The binary with a bound on its memory, where the system's shell can set one.
fn bounded() -> Command {
    let binary = env!("CARGO_BIN_EXE_nappe");
    if cfg!(target_os = "linux") {
        let script = r#"ulimit -v 1000000; exec "$0" "$@""#;
        Command::new("sh").args(["-c", script, binary])
    } else {
        Command::new(binary)
    }
}

/// Hostile files, by name.
fn hostile() -> Vec<(&'static str, Vec<u8>)> {
    const MEGABYTE: usize = 1024 * 1024;
    let junk: Vec<u8> = (0..30 * MEGABYTE).map(|index| (index % 251) as u8).collect();
    let source = "[[error_source]]\nname = \"gauge\"\nacts_on = \"head\"\nresolution = \"1 mm\"\n";
    let station = "name = \"Quillmere\"\n[structure]\nkind = \"thin-plate-triangular\"\n\
                   notch_angle = \"90 deg\"\ncrest_height = \"0.45 m\"\n\
                   approach_width = \"1.2 m\"\n";
    vec![
        ("thirty-megabytes-of-junk", junk),
        ("thirty-megabytes-of-toml", source.repeat(30 * MEGABYTE / source.len()).into_bytes()),
        ("not-utf-8", b"name = \"\xff\xfe\"\n".to_vec()),
        ("empty", Vec::new()),
        ("lists-a-hundred-thousand-deep", format!("a = {}", "[".repeat(100_000)).into_bytes()),
        ("tables-a-hundred-thousand-deep", format!("a = {}", "{a = ".repeat(100_000)).into_bytes()),
        ("names-a-hundred-thousand-deep", format!("[{}a]", "a.".repeat(100_000)).into_bytes()),
        ("two-thousand-sources", format!("{station}{}", source.repeat(2000)).into_bytes()),
        ("one-long-line", format!("{} = 1\n", "x".repeat(900_000)).into_bytes()),
        ("one-long-text", format!("{station}evidence = \"{}", "x".repeat(900_000)).into_bytes()),
        ("one-long-number", format!("{station}gravity = {}", "9".repeat(900_000)).into_bytes()),
        ("a-fault-on-each-line", "= 1\n".repeat(200_000).into_bytes()),
        ("an-unknown-key-on-each-line", (0..60_000).flat_map(unknown_key).collect()),
        ("zero-bytes", vec![0; 1000]),
        ("zero-bytes-in-a-text", station.replace("Quill", "Quill\0").into_bytes()),
        ("byte-order-mark-alone", b"\xef\xbb\xbf".to_vec()),
    ]
}

fn unknown_key(index: u32) -> Vec<u8> {
    format!("key{index} = {index}\n").into_bytes()
}

/// A refusal, said in a few words and in time.
fn assert_refused(name: &str, path: &Path) {
    let output = check(bounded(), path);
    let words = String::from_utf8_lossy(&output.stderr);
    let beginning: String = words.chars().take(2000).collect();
    // Stopped for its time or memory, it has no exit status.
    assert_eq!(output.status.code(), Some(2), "{name}: {}\n{beginning}", output.status);
    assert!(words.contains("error"), "{name}: {beginning}");
    assert!(!words.contains("panicked"), "{name}: {beginning}");
    assert!(words.len() < 50_000, "{name}: a flood of {} bytes: {beginning}", words.len());
    assert!(output.stdout.is_empty(), "{name}: a refusal belongs on standard error alone");
}

#[test]
fn hostile_input_is_refused_in_bounded_time_and_memory() {
    let folder = PathBuf::from(env!("CARGO_TARGET_TMPDIR")).join("hostile");
    std::fs::create_dir_all(&folder).unwrap();
    for (name, bytes) in hostile() {
        let path = folder.join(format!("{name}.toml"));
        std::fs::write(&path, bytes).unwrap();
        assert_refused(name, &path);
        std::fs::remove_file(&path).unwrap();
    }
    assert_refused("a folder", &folder);
    assert_refused("a missing file", &folder.join("missing.toml"));
}
