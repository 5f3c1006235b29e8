//! Reading level lists, right and wrong ones, and smoothing their staircase.

use std::io::Write;
use std::path::Path;

use orbitsum::levels::{
    LevelList, ListColumn, ListError, ListNote, Residual, ResidualWindow, density, read,
    residual_rms, staircase,
};
use proptest::prelude::*;

fn read_bytes(bytes: &[u8]) -> Result<LevelList, ListError> {
    let mut file = tempfile::NamedTempFile::new().expect("a temporary file");
    file.write_all(bytes).expect("written");
    read(file.path())
}

fn read_text(text: &str) -> Result<LevelList, ListError> {
    read_bytes(text.as_bytes())
}

#[test]
fn the_quarter_stadium() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("data/quarter-stadium.csv");
    let list = read(&path).expect("the list is readable");
    assert_eq!(list.values.len(), 281);
    assert_eq!(list.column, Some(ListColumn::WaveNumber));
    assert!((list.values[0] - 3.640_464_364_83).abs() < 1e-11);
    assert_eq!(list.errors.as_ref().map(Vec::len), Some(281));
    assert_eq!(list.widths, None);
    assert!(list.notes.is_empty(), "{:?}", list.notes);
    assert!(list.values.is_sorted() && list.values[280] < 46.0);
}

#[test]
fn one_column_with_comments_and_repetitions() {
    let list =
        read_text("\u{feff}# measured\n\n3.5\r\n1.25\n  3.5\n7e0\n# end\n").expect("readable");
    assert_eq!(list.values, [1.25, 3.5, 3.5, 7.0]);
    assert_eq!(list.column, None);
    assert_eq!(
        list.notes,
        [
            ListNote::Sorted { line: 4 },
            ListNote::Repeated { values: 1 }
        ]
    );
}

#[test]
fn named_columns_stay_together_when_sorted() {
    let list = read_text("n;Energy;error;width;multiplicity;who\n1;4;0.4;40;1;x\n2;2;0.2;20;2;y\n")
        .expect("readable");
    assert_eq!(list.values, [2.0, 2.0, 4.0]);
    assert_eq!(list.errors, Some(vec![0.2, 0.2, 0.4]));
    assert_eq!(list.widths, Some(vec![20.0, 20.0, 40.0]));
    assert_eq!(list.column, Some(ListColumn::Energy));
    let unknown = ListNote::UnknownColumn {
        name: "who".to_owned(),
    };
    assert_eq!(
        list.notes,
        [
            unknown,
            ListNote::Sorted { line: 3 },
            ListNote::Repeated { values: 1 }
        ]
    );
}

#[test]
fn white_space_and_quoted_names() {
    let list = read_text("\"frequency\"   error\n 1.0\t0.1\n2.0   0.1\n").expect("readable");
    assert_eq!(list.values, [1.0, 2.0]);
    assert_eq!(list.column, Some(ListColumn::Frequency));
}

#[test]
fn k_comes_before_energy() {
    let list =
        read_text("n,k,energy,error,multiplicity\n1,2,4,0,1\n2,3,8,0,1\n").expect("readable");
    assert_eq!(list.values, [2.0, 3.0]);
    assert_eq!(
        list.notes,
        [ListNote::OtherLevels {
            used: ListColumn::WaveNumber,
            ignored: ListColumn::Energy
        }]
    );
}

/// The columns that `levels` writes: energy repeats k, so that nothing is lost by not reading it.
#[test]
fn an_energy_that_is_k_squared_goes_without_saying() {
    for rows in [
        "1,2,4,0,1\n2,3,9,0,1\n",
        "1,0,0,0,1\n2,1.234567,1.524156,0,1\n",
    ] {
        let text = format!("n,k,energy,error,multiplicity\n{rows}");
        let list = read_text(&text).expect("readable");
        assert_eq!(list.column, Some(ListColumn::WaveNumber));
        assert_eq!(list.notes, []);
    }
    for row in ["2,3,9.001,0,1", "2,3,?,0,1", "2,3,nan,0,1"] {
        let text = format!("n,k,energy,error,multiplicity\n1,2,4,0,1\n{row}\n");
        assert_eq!(read_text(&text).expect("readable").notes.len(), 1, "{row}");
    }
}

/// What is wrong, and a part of the message that must say so.
#[test]
fn wrong_lists_are_refused() {
    let cases: [(&[u8], &str); 17] = [
        (b"", "is empty"),
        (b"# nothing\n\n", "is empty"),
        (b"k,error\n", "is empty"),
        (
            b"1\n2\nabc\n",
            "line 3: `abc` in column `levels` is not a number",
        ),
        (
            b"12.3x\n",
            "line 1: `12.3x` in column `levels` is not a number",
        ),
        (b"k\n1\nNaN\n", "line 3: `NaN` in column `k` is not finite"),
        (
            b"1\ninf\n",
            "line 2: `inf` in column `levels` is not finite",
        ),
        (
            b"1e999\n",
            "line 1: `1e999` in column `levels` is not finite",
        ),
        (b"1\n-2\n", "line 2: -2 in column `levels` is negative"),
        (
            b"k,error\n1,-0.1\n",
            "line 2: -0.1 in column `error` is negative",
        ),
        (b"1\n\xff\xfe\n", "line 2: not UTF-8"),
        (
            b"1 2\n3 4\n",
            "line 1: no column of levels among 2 columns without names",
        ),
        (
            b"# x\nn,wavenumber\n1,2\n",
            "line 2: no column of levels among n, wavenumber",
        ),
        (b"k,k\n1,2\n", "line 1: two columns are named `k`"),
        (
            b"k,error\n1,0\n2\n",
            "line 3: 1 fields where the lines above have 2",
        ),
        (
            b"k,multiplicity\n1,0\n",
            "line 2: multiplicity `0` is not a whole number",
        ),
        (
            b"k,multiplicity\n1,1.5\n",
            "line 2: multiplicity `1.5` is not a whole number",
        ),
    ];
    for (bytes, expected) in cases {
        let message = read_bytes(bytes).expect_err("a wrong list").to_string();
        assert!(
            message.contains(expected),
            "{message:?} does not say {expected:?}"
        );
    }
    let missing = read(Path::new("no-such-list.csv"))
        .expect_err("no file")
        .to_string();
    assert!(
        missing.contains("cannot read the level list no-such-list.csv"),
        "{missing}"
    );
    let folder = read(Path::new(".")).expect_err("a folder").to_string();
    assert!(folder.contains("cannot read"), "{folder}");
}

/// The normal distribution function, Abramowitz & Stegun, Table 26.1 (from memory): P(0.5), P(1), P(2), and Z(1).
#[test]
fn one_step_is_the_normal_distribution() {
    let smoothing = 0.2;
    let points: Vec<f64> = [0.5, 1.0, 2.0, 20.0, -20.0]
        .iter()
        .map(|t| 5.0 + t * smoothing)
        .collect();
    let steps = staircase(&[5.0], &points, smoothing);
    for (step, expected) in steps.iter().zip([
        0.691_462_461_274_013,
        0.841_344_746_068_543,
        0.977_249_868_051_821,
        1.0,
        0.0,
    ]) {
        assert!((step - expected).abs() < 2e-15, "{step} {expected}");
    }
    let density = density(&[5.0], &points, smoothing);
    assert!((density[1] * smoothing - 0.241_970_724_519_143).abs() < 1e-15);
}

#[test]
fn without_smoothing_a_level_counts_half_at_itself() {
    assert_eq!(
        staircase(&[1.0, 2.0, 2.0], &[0.5, 1.0, 1.5, 2.0, 3.0], 0.0),
        [0.0, 0.5, 1.0, 2.0, 3.0]
    );
    assert_eq!(density(&[1.0], &[0.5, 1.0], 0.0), [0.0, f64::INFINITY]);
    assert_eq!(staircase(&[], &[1.0], 0.1), [0.0]);
}

#[test]
fn residuals_leave_out_the_end_of_the_list() {
    let points: Vec<f64> = (0..=100).map(|index| 0.1 * f64::from(index)).collect();
    let residual = vec![0.5; points.len()];
    let window = ResidualWindow {
        from: 1.0,
        to: 9.0,
        list_end: 8.0,
        smoothing: 0.1,
    };
    let Residual {
        rms,
        points: count,
        used_to,
        cut,
    } = residual_rms(&points, &residual, &window);
    assert_eq!((rms, count), (Some(0.5), 66));
    assert!((used_to - 7.5).abs() < 1e-12 && (cut - 1.5).abs() < 1e-12);
    let beyond = residual_rms(
        &points,
        &residual,
        &ResidualWindow {
            list_end: 1.2,
            ..window
        },
    );
    assert_eq!((beyond.rms, beyond.points, beyond.cut), (None, 0, 8.0));
    let whole = residual_rms(
        &points,
        &residual,
        &ResidualWindow {
            list_end: 20.0,
            ..window
        },
    );
    assert_eq!((whole.points, whole.cut), (81, 0.0));
}

proptest! {
    /// The walk along the list finds the same levels as a sum over all of them, in any order of points.
    #[test]
    fn staircase_equals_the_plain_sum(
        mut values in prop::collection::vec(0.0..50.0, 0..60),
        points in prop::collection::vec(-5.0..55.0, 0..60),
        smoothing in 1e-3..5.0,
    ) {
        values.sort_by(f64::total_cmp);
        let fast = staircase(&values, &points, smoothing);
        for (value, point) in fast.iter().zip(&points) {
            let step = |level: &f64| 0.5 * libm::erfc((level - point) / (smoothing * std::f64::consts::SQRT_2));
            let plain: f64 = values.iter().map(step).sum();
            prop_assert!((value - plain).abs() < 1e-14 * (1.0 + plain), "{value} {plain}");
        }
    }

    /// No text makes the reader panic, and what it reads is sorted and finite.
    #[test]
    fn any_text_is_read_or_refused(text in "([a-z#,; .0-9\\-\n\"]{0,80})|(k,error\n([0-9.]{1,4},[0-9e]{1,3}\n){0,9})") {
        if let Ok(list) = read_text(&text) {
            prop_assert!(list.values.is_sorted() && list.values.iter().all(|value| value.is_finite()));
        }
    }
}
