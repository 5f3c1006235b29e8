//! Directly computed levels of polygons with levels in closed form: rectangle, right isosceles and equilateral triangle (Lame 1852;
//! McCartin, SIAM Rev. 45 (2003) 267), Dirichlet and Neumann walls, their classes, and classes of hexagon and slit square that are
//! those of simpler polygons.

#[path = "common/direct.rs"]
mod direct;

use direct::{
    check, equilateral_classes, equilaterals, hexagon_classes, rectangle_classes, rectangles,
    right_isosceles, slit_squares, square, square_classes,
};

#[test]
fn rectangles_with_all_conditions() {
    check(&rectangles());
}

#[test]
fn classes_of_the_rectangle() {
    check(&rectangle_classes());
}

/// Many levels are degenerate, by symmetry and by chance.
#[test]
fn square_and_its_classes() {
    check(&[square()]);
    check(&square_classes());
}

#[test]
fn right_isosceles_triangles() {
    check(&right_isosceles());
}

#[test]
fn equilateral_triangles_and_their_classes() {
    check(&equilaterals());
    check(&equilateral_classes());
}

#[test]
fn classes_of_the_hexagon_that_are_those_of_a_triangle() {
    check(&hexagon_classes());
}

/// The tips of the slit do not matter to these classes.
#[test]
fn classes_of_the_slit_square_that_are_those_of_half_a_square() {
    check(&slit_squares());
}
