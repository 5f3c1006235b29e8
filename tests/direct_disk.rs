//! Directly computed levels of disk and half disk against zeros of Bessel functions and their derivatives
//! (data/reference/disk_*.csv, from scipy 1.17.1 and mpmath 1.4.1).

#[path = "common/direct.rs"]
mod direct;

use direct::{check, check_below, check_window, disks, half_disk_classes, half_disks};

/// End of the window of classes, whose whole shapes are tested further up.
const CLASSES_TOP: f64 = 30.0;

#[test]
fn dirichlet_disk() {
    check(&disks()[..1]);
}

#[test]
fn neumann_disk() {
    check(&disks()[1..]);
}

#[test]
fn half_disk_with_all_conditions() {
    check(&half_disks());
}

#[test]
fn classes_of_the_half_disk() {
    check_below(&half_disk_classes(), CLASSES_TOP);
}

/// Windows that follow each other, the third without a level, the fourth with one or two.
#[test]
fn windows_of_the_disk() {
    for case in disks() {
        for window in [
            [0.0, 5.0],
            [5.0, 17.5],
            [17.5, 17.6],
            [17.6, 17.62],
            [17.62, 31.0],
        ] {
            check_window(&case, window);
        }
        assert!(case.between(17.5, 17.6).is_empty());
        assert!(!case.between(17.6, 17.62).is_empty());
    }
}
