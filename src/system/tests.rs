use super::*;
use crate::billiard::{Condition, Role, VertexKind};
use std::f64::consts::PI;

const SQUARE: &str = "
[outline]
start = [-1, -1]
condition = \"neumann\"
wall = [
  { line = [1, -1] },
  { line = [1, 1], condition = \"dirichlet\" },
  { line = [-1, 1] },
  { line = [-1, -1] },
]
";

fn read(text: &str) -> System {
    match parse(text, Path::new("test.toml"), &[]) {
        Ok(system) => system,
        Err(error) => panic!("{}", error.render()),
    }
}

fn parameter(system: &System, name: &str) -> f64 {
    let found = system.parameters.iter().find(|(known, _)| known == name);
    found.expect("a parameter of this name").1
}

#[test]
fn conditions_of_walls_override_those_of_the_loop() {
    let domain = read(SQUARE).domain;
    let conditions: Vec<Condition> = domain.walls.iter().map(|wall| wall.condition).collect();
    use Condition::{Dirichlet, Neumann};
    assert_eq!(conditions, [Neumann, Dirichlet, Neumann, Neumann]);
}

#[test]
fn parameters_depend_on_those_before_them_and_settings_go_first() {
    let text = format!("[parameters]\nz = 2\na = \"3*z\"\nb = \"a + z\"\n{SQUARE}");
    let system = read(&text);
    let names: Vec<&str> = system
        .parameters
        .iter()
        .map(|(name, _)| name.as_str())
        .collect();
    assert_eq!(names, ["z", "a", "b"]);
    assert_eq!(parameter(&system, "b"), 8.0);
    let set = |name: &str, value: &str| (name.to_owned(), value.to_owned());
    let settings = [set("a", "99"), set("a", "z/4"), set("z", "2*pi")];
    let system = parse(&text, Path::new("test.toml"), &settings).expect("a system");
    assert_eq!(parameter(&system, "a"), PI / 2.0);
    assert_eq!(parameter(&system, "b"), 2.5 * PI);
}

#[test]
fn the_name_is_that_of_the_file_if_none_is_given() {
    assert_eq!(read(SQUARE).name, "test");
    assert_eq!(read(&format!("name = \"box\"{SQUARE}")).name, "box");
}

#[test]
fn slits_behind_holes_have_the_right_twins_and_places() {
    let text = format!(
        "{SQUARE}
[[slit]]
start = [0.5, 0.5]
wall = [
  {{ line = [0.7, 0.5] }},
  {{ line = [0.7, 0.7] }},
]
[[hole]]
start = [0, 0]
wall = [
  {{ line = [0.2, 0] }},
  {{ line = [0.2, 0.2] }},
  {{ line = [0, 0] }},
]
"
    );
    let system = read(&text);
    let domain = &system.domain;
    let roles: Vec<Role> = domain.loops.iter().map(|chain| chain.role).collect();
    assert_eq!(roles, [Role::Outer, Role::Hole, Role::Slit]);
    let twins: Vec<Option<usize>> = domain.walls[7..].iter().map(|wall| wall.twin).collect();
    assert_eq!(twins, [Some(10), Some(9), Some(8), Some(7)]);
    for wall in 7..11 {
        let twin = domain.walls[wall].twin.expect("a twin");
        assert_eq!(domain.walls[wall].start(), domain.walls[twin].end());
        assert_eq!(domain.walls[twin].twin, Some(wall));
    }
    assert!((domain.vertices[7].angle - 2.0 * PI).abs() < 1e-15);
    assert!((domain.area - (4.0 - 0.02)).abs() < 1e-14);
    assert!((domain.perimeter - (8.0 + 0.8 + 0.4 + 0.08f64.sqrt())).abs() < 1e-14);
    // The hole was given counter-clockwise, so its last wall comes first.
    let line_of = |wall: usize| {
        let error = system.geometry_error(&GeometryError::NoLength { wall });
        let (line, _) = error.position().expect("a place");
        text.lines()
            .nth(line - 1)
            .expect("a line")
            .trim()
            .to_owned()
    };
    assert_eq!(line_of(1), "{ line = [1, 1], condition = \"dirichlet\" },");
    assert_eq!(line_of(4), "{ line = [0, 0] },");
    assert_eq!(line_of(6), "{ line = [0.2, 0] },");
    assert_eq!(line_of(7), "{ line = [0.7, 0.5] },");
    assert_eq!(line_of(10), "{ line = [0.7, 0.5] },");
}

#[test]
fn curves_circles_and_polar_curves_can_stand_anywhere() {
    let area = |wall: &str| read(&format!("[outline]\nwall = [ {wall} ]\n")).domain.area;
    for wall in [
        "{ circle = 2, center = [5, 1] }",
        "{ polar = { r = 2, from = 0, to = \"2*pi\", center = [5, 1] } }",
        "{ polar = { r = 2, from = 0, to = \"2*pi\" }, center = [5, 1] }",
        "{ curve = { x = \"5 + 2*cos(t)\", y = \"1 + 2*sin(t)\", from = \"-pi\", to = \"pi\" } }",
        "{ curve = { x = \"5 + 2*cos(t)\", y = \"1 - 2*sin(t)\", from = \"2*pi\", to = 0 } }",
    ] {
        assert!((area(wall) / (4.0 * PI) - 1.0).abs() < 1e-13, "{wall}");
    }
}

#[test]
fn arcs_turn_left_or_right() {
    let area = |turn: &str| {
        let text = format!(
            "[outline]\nstart = [1, 1]\nwall = [ {{ line = [-1, 1] }}, {{ line = [-1, 0] }},
            {{ arc = [1, 0], center = [0, 0]{turn} }}, {{ line = [1, 1] }} ]"
        );
        read(&text).domain.area
    };
    assert!((area("") - (2.0 + PI / 2.0)).abs() < 1e-14);
    let text = "[outline]\nstart = [2, 2]\nwall = [ { line = [-2, 2] }, { line = [-2, 0] }, { line = [-1, 0] },
        { arc = [1, 0], center = [0, 0], turn = \"right\" }, { line = [2, 0] }, { line = [2, 2] } ]";
    assert!((read(text).domain.area - (8.0 - PI / 2.0)).abs() < 1e-14);
}

#[test]
fn a_closed_spline_is_smooth_everywhere() {
    let points: Vec<String> = (0..24)
        .map(|i| {
            let angle = 2.0 * PI * f64::from(i) / 24.0;
            format!("[{}, {}]", 1.5 * angle.cos(), angle.sin())
        })
        .collect();
    let system = read(&format!(
        "[outline]\nwall = [ {{ spline = [{}] }} ]",
        points.join(", ")
    ));
    assert_eq!(system.domain.walls.len(), 24);
    for vertex in &system.domain.vertices {
        assert_eq!(vertex.kind, VertexKind::Smooth);
    }
    // Through 24 points the spline differs from the ellipse by a few parts in 10^5.
    assert!((system.domain.area / (1.5 * PI) - 1.0).abs() < 1e-4);
}

#[test]
fn measured_points_are_read_beside_the_system_file_and_closed() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let table = "# invented\nx y\n0 0\n2 0\n2, 1\n0\t1\n";
    std::fs::write(folder.path().join("points.csv"), table).expect("writing points");
    let file = folder.path().join("box.toml");
    std::fs::write(&file, "[outline]\nwall = [ { points = \"points.csv\" } ]\n").expect("writing");
    let system = load(&file, &[]).expect("a system");
    assert_eq!(system.domain.walls.len(), 4);
    assert!((system.domain.area - 2.0).abs() < 1e-14);
}

#[test]
fn units_are_read() {
    let text = format!(
        "{SQUARE}\n[units]\nlength = \"cm\"\nlevels = \"GHz\"\npermittivity = 4\nheight = \"1/2\"\n"
    );
    let units = read(&text).units;
    // Half a centimetre, permittivity 4: c/(2 * 0.005 m * 2) = 14.99 GHz.
    let limit = units.flat_limit().expect("a height");
    assert!((limit - 14.989_622_9).abs() < 1e-12);
    // Wavelength in the filling at 1 GHz: 14.99 cm.
    assert!((units.k(1.0) - 2.0 * PI / 14.989_622_9).abs() < 1e-14);
    assert_eq!(read(SQUARE).units, Units::default());
}

#[test]
fn a_declared_symmetry_is_kept_with_its_place() {
    let system = read(&format!("symmetry = \"rectangle\"{SQUARE}"));
    assert_eq!(system.declared_symmetry.as_deref(), Some("rectangle"));
    let message = system.symmetry_error("square").render();
    assert!(message.contains("test.toml:1:12") && message.contains("`square`"));
}
