//! `judge` over a file of readings, beside a plain pass through the same file with the same CSV library.

use std::ffi::OsString;
use std::fs;
use std::io::{self, Write};
use std::path::{Path, PathBuf};
use std::sync::OnceLock;

use divan::counter::ItemsCount;
use divan::{Bencher, black_box};
use nulltray::cli;

const SIZES: [usize; 3] = [1_000, 10_000, 100_000];

fn main() {
    divan::main();
    let _ = fs::remove_dir_all(folder());
}

fn folder() -> PathBuf {
    let folder =
        Path::new(env!("CARGO_TARGET_TMPDIR")).join(format!("bench-judge-{}", std::process::id()));
    fs::create_dir_all(&folder).expect("the folder can be made");
    folder
}

/// A file of so many readings of equal parts, about their value and about their lower limit.
fn file(n: usize) -> &'static Path {
    static PATHS: [OnceLock<PathBuf>; 3] = [const { OnceLock::new() }; 3];
    let index = SIZES
        .iter()
        .position(|size| *size == n)
        .expect("one of the sizes");
    PATHS[index].get_or_init(|| {
        let mut text = "marking,family,switch,dial,note\n".to_owned();
        for i in 0..n {
            // Two of a hundred lie near the lower limit.
            let place = if i % 100 < 98 {
                53.0 + (i % 49) as f64 / 10.0
            } else {
                49.0 + (i % 7) as f64 / 10.0
            };
            let row = format!("104K 250V,pet,B,{place:.1},board {}\n", i % 12);
            text.push_str(&row);
        }
        let path = folder().join(format!("{n}.csv"));
        fs::write(&path, text).expect("written");
        path
    })
}

fn judged(path: &Path, to: &mut dyn Write) {
    let meter = Path::new(env!("CARGO_MANIFEST_DIR")).join("data/example-meter.toml");
    let arguments = [
        "nulltray".into(),
        "judge".into(),
        "--meter".into(),
        meter.into_os_string(),
        path.into(),
    ];
    let arguments: [OsString; 5] = arguments;
    let _ = cli::run(arguments, &mut io::empty(), to, &mut io::sink());
}

#[divan::bench(args = SIZES, sample_count = 10)]
fn judge(bencher: Bencher<'_, '_>, n: usize) {
    let path = file(n);
    let mut output = Vec::new();
    judged(path, &mut output);
    let text = String::from_utf8(output).expect("text");
    assert_eq!(text.lines().count(), n + 1);
    assert!(text.lines().filter(|row| row.contains(",inside,")).count() >= n * 97 / 100);
    bencher
        .counter(ItemsCount::new(n))
        .bench(|| judged(black_box(path), &mut io::sink()));
}

#[divan::bench(args = SIZES, sample_count = 10)]
fn csv_pass_through(bencher: Bencher<'_, '_>, n: usize) {
    let path = file(n);
    let pass = || {
        let mut reader = csv::ReaderBuilder::new()
            .has_headers(false)
            .from_path(path)
            .expect("a file");
        let mut writer = csv::Writer::from_writer(io::sink());
        let mut record = csv::ByteRecord::new();
        let mut n_rows = 0;
        while reader.read_byte_record(&mut record).expect("a row") {
            writer.write_byte_record(&record).expect("written");
            n_rows += 1;
        }
        n_rows
    };
    assert_eq!(pass(), n + 1);
    bencher.counter(ItemsCount::new(n)).bench(pass);
}
