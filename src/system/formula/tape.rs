//! A compiled formula: a straight list of operations on numbered slots.

use super::{Function, Number, Span};

/// An operation on two numbers.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Binary {
    Add,
    Subtract,
    Multiply,
    Divide,
    Power,
    Atan2,
    Hypot,
    Minimum,
    Maximum,
}

impl Binary {
    /// Functions of two arguments by their names.
    pub(super) const NAMES: [(&'static str, Self); 4] = [
        ("atan2", Self::Atan2),
        ("hypot", Self::Hypot),
        ("min", Self::Minimum),
        ("max", Self::Maximum),
    ];

    pub(super) fn evaluate<N: Number>(self, a: &N, b: &N) -> N {
        match self {
            Self::Add => a.clone() + b.clone(),
            Self::Subtract => a.clone() - b.clone(),
            Self::Multiply => a.clone() * b.clone(),
            Self::Divide => a.clone() / b.clone(),
            Self::Power => a.power_of(b),
            Self::Atan2 => a.atan2(b),
            Self::Hypot => a.hypot(b),
            Self::Minimum => a.minimum(b),
            Self::Maximum => a.maximum(b),
        }
    }
}

/// One step of the tape; numbers are slots.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Operation {
    Constant(f64),
    Negate(usize),
    Scale(usize, f64),
    Offset(usize, f64),
    Power(usize, f64),
    Apply(Function, usize),
    /// Sine; the cosine of the same slot always follows, so that both are computed at once.
    Sine(usize),
    Cosine(usize),
    Binary(Binary, usize, usize),
}

/// Where an operation was written.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Origin {
    /// Number of the formula (outputs count from 0).
    pub formula: usize,
    /// Place in its text.
    pub span: Span,
}

/// On which piece of a function with pieces an argument lies.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Branch {
    /// The function is smooth here whatever came before.
    Free,
    /// Between two pieces.
    Edge,
    /// On a piece.
    Piece(i64),
}

/// Follows the pieces of functions such as abs from sample to sample.
#[derive(Clone, Debug)]
pub struct Pieces(Vec<Branch>);

/// Compiled formulas with common variables. Slots 0.. hold the variables, then one slot per operation.
#[derive(Clone, Debug)]
pub struct Tape {
    pub(super) variables: usize,
    pub(super) operations: Vec<Operation>,
    pub(super) origins: Vec<Origin>,
    pub(super) outputs: Vec<usize>,
}

/// Tapes with at most this many slots are evaluated on the stack.
const SMALL: usize = 16;
/// The same for longer ones: beyond it the cost of an allocation no longer matters.
const MEDIUM: usize = 64;

impl Tape {
    /// Values of the first `OUTPUTS` formulas at the given variables.
    ///
    /// # Panics
    /// When there are fewer formulas or other variables than the tape was built with, which is a programming error.
    #[must_use]
    pub fn evaluate<N: Number, const OUTPUTS: usize>(&self, variables: &[N]) -> [N; OUTPUTS] {
        let slots = self.variables + self.operations.len();
        if slots <= SMALL {
            self.run(
                &mut std::array::from_fn::<N, SMALL, _>(|_| N::constant(0.0)),
                variables,
            )
        } else if slots <= MEDIUM {
            self.run(
                &mut std::array::from_fn::<N, MEDIUM, _>(|_| N::constant(0.0)),
                variables,
            )
        } else {
            self.run(&mut vec![N::constant(0.0); slots], variables)
        }
    }

    fn run<N: Number, const OUTPUTS: usize>(
        &self,
        slots: &mut [N],
        variables: &[N],
    ) -> [N; OUTPUTS] {
        slots[..self.variables].clone_from_slice(variables);
        for (slot, operation) in (self.variables..).zip(&self.operations) {
            match *operation {
                Operation::Sine(a) => (slots[slot], slots[slot + 1]) = slots[a].sin_cos(),
                Operation::Cosine(_) => {}
                other => slots[slot] = step(other, slots),
            }
        }
        std::array::from_fn(|output| slots[self.outputs[output]].clone())
    }

    /// All slots at plain values.
    fn slots(&self, variables: &[f64]) -> Vec<f64> {
        let mut slots = variables.to_vec();
        for operation in &self.operations {
            let value = step(*operation, &slots);
            slots.push(value);
        }
        slots
    }

    /// Place of the first operation whose value is not finite, if there is one.
    #[must_use]
    pub fn not_finite(&self, variables: &[f64]) -> Option<Origin> {
        let slots = self.slots(variables);
        (0..self.operations.len())
            .find(|&offset| !slots[self.variables + offset].is_finite())
            .map(|offset| self.origins[offset])
    }

    /// Start of a walk along the variables that watches for kinks, jumps and poles.
    #[must_use]
    pub fn pieces(&self) -> Pieces {
        Pieces(vec![Branch::Free; self.operations.len()])
    }

    /// Goes on to the next sample of the walk; gives the place of an operation that passed from one of its smooth pieces to
    /// another since the sample before (abs through zero, a pole of a quotient or of tan, the cut of atan2).
    pub fn next_piece(&self, pieces: &mut Pieces, variables: &[f64]) -> Option<Origin> {
        let slots = self.slots(variables);
        let mut passed = None;
        for (offset, operation) in self.operations.iter().enumerate() {
            let now = branch(*operation, &slots);
            let before = &mut pieces.0[offset];
            if let (Branch::Piece(a), Branch::Piece(b)) = (*before, now)
                && a != b
                && passed.is_none()
            {
                passed = Some(self.origins[offset]);
            }
            if now != Branch::Edge {
                *before = now;
            }
        }
        passed
    }
}

fn step<N: Number>(operation: Operation, slots: &[N]) -> N {
    match operation {
        Operation::Constant(value) => N::constant(value),
        Operation::Negate(a) => -slots[a].clone(),
        Operation::Scale(a, factor) => slots[a].scale(factor),
        Operation::Offset(a, summand) => slots[a].offset(summand),
        Operation::Power(a, exponent) => slots[a].power(exponent),
        Operation::Apply(function, a) => slots[a].apply(function),
        Operation::Sine(a) => slots[a].apply(Function::Sin),
        Operation::Cosine(a) => slots[a].apply(Function::Cos),
        Operation::Binary(binary, a, b) => binary.evaluate(&slots[a], &slots[b]),
    }
}

fn branch(operation: Operation, slots: &[f64]) -> Branch {
    let side = |x: f64| {
        if x == 0.0 {
            Branch::Edge
        } else {
            Branch::Piece(if x > 0.0 { 1 } else { -1 })
        }
    };
    match operation {
        Operation::Apply(Function::Abs | Function::Cbrt | Function::Log | Function::Sqrt, a) => {
            side(slots[a])
        }
        Operation::Apply(Function::Tan, a) => {
            let half_turns = (slots[a] / std::f64::consts::PI + 0.5).floor();
            Branch::Piece(half_turns as i64)
        }
        Operation::Power(a, exponent) if exponent < 0.0 || exponent.fract() != 0.0 => {
            side(slots[a])
        }
        Operation::Binary(Binary::Divide, _, b) => side(slots[b]),
        Operation::Binary(Binary::Minimum | Binary::Maximum, a, b) => side(slots[a] - slots[b]),
        Operation::Binary(Binary::Atan2, y, x) if slots[x] < 0.0 => side(slots[y]),
        _ => Branch::Free,
    }
}
