//! From tokens to a tape, in one pass: precedence climbing that folds constants as it goes.

use super::tape::{Binary, Operation, Origin, Tape};
use super::token::{Kind, Token, tokens};
use super::{FormulaError, FormulaProblem, Function, Scope, Span};

/// Parentheses, signs and powers may be nested this deep; people stay below ten, and the stack holds much more.
const DEPTH_LIMIT: usize = 100;
/// Longest formula in bytes; a line of a system file that is longer was written by accident.
const LENGTH_LIMIT: usize = 20_000;

/// Binding strength of + and - between two numbers.
const SUM: u8 = 1;
/// Binding strength of * and /.
const PRODUCT: u8 = 2;
/// Binding strength of a sign: stronger than a product, weaker than a power, so that -x^2 is -(x^2).
const SIGN: u8 = 3;
/// Binding strength of ^.
const POWER: u8 = 4;

/// Compiles formulas that share variables into one tape.
#[derive(Debug)]
pub struct Builder<'a> {
    scope: &'a Scope,
    variables: &'a [&'a str],
    operations: Vec<Operation>,
    origins: Vec<Origin>,
    outputs: Vec<usize>,
}

/// A part of a formula: already a number, or known only when the variables are.
#[derive(Clone, Copy, Debug)]
pub(super) enum Operand {
    Constant(f64),
    Slot(usize),
}

impl<'a> Builder<'a> {
    /// Formulas may use the constants of `scope` and the given variables.
    #[must_use]
    pub fn new(scope: &'a Scope, variables: &'a [&'a str]) -> Self {
        Self {
            scope,
            variables,
            operations: Vec::new(),
            origins: Vec::new(),
            outputs: Vec::new(),
        }
    }

    /// Adds a formula; it becomes the next output of the tape.
    ///
    /// # Errors
    /// What is wrong with the formula, and where.
    pub fn formula(mut self, text: &str) -> Result<Self, FormulaError> {
        let formula = self.outputs.len();
        let operand = Parser::read(&mut self, text)?;
        let whole = Span::new(0, text.len());
        let slot = self.slot(
            operand,
            Origin {
                formula,
                span: whole,
            },
        );
        self.outputs.push(slot);
        Ok(self)
    }

    /// The compiled formulas.
    #[must_use]
    pub fn finish(self) -> Tape {
        Tape {
            variables: self.variables.len(),
            operations: self.operations,
            origins: self.origins,
            outputs: self.outputs,
        }
    }

    /// Value of a formula without variables.
    pub(super) fn value(mut self, text: &str) -> Result<f64, FormulaError> {
        match Parser::read(&mut self, text)? {
            Operand::Constant(value) => Ok(value),
            // Without variables everything is folded.
            Operand::Slot(_) => Err(FormulaError::new(
                Span::new(0, text.len()),
                FormulaProblem::Empty,
            )),
        }
    }

    /// Slot of an operation, an earlier one if the same was computed before.
    fn push(&mut self, operation: Operation, origin: Origin) -> usize {
        let known = self.operations.iter().position(|&other| other == operation);
        let offset = known.unwrap_or_else(|| {
            self.operations.push(operation);
            self.origins.push(origin);
            self.operations.len() - 1
        });
        self.variables.len() + offset
    }

    /// Slot of a function; sine and cosine come in pairs.
    fn push_function(&mut self, function: Function, slot: usize, origin: Origin) -> usize {
        if !matches!(function, Function::Sin | Function::Cos) {
            return self.push(Operation::Apply(function, slot), origin);
        }
        let sine = self.push(Operation::Sine(slot), origin);
        let cosine = self.push(Operation::Cosine(slot), origin);
        if function == Function::Sin {
            sine
        } else {
            cosine
        }
    }

    fn slot(&mut self, operand: Operand, origin: Origin) -> usize {
        match operand {
            Operand::Constant(value) => self.push(Operation::Constant(value), origin),
            Operand::Slot(slot) => slot,
        }
    }
}

/// Reads one formula.
struct Parser<'b, 'a> {
    builder: &'b mut Builder<'a>,
    text: &'b str,
    tokens: Vec<Token>,
    next: usize,
    depth: usize,
}

impl<'b, 'a> Parser<'b, 'a> {
    fn read(builder: &'b mut Builder<'a>, text: &'b str) -> Result<Operand, FormulaError> {
        if text.len() > LENGTH_LIMIT {
            return Err(FormulaError::new(
                Span::new(0, text.len()),
                FormulaProblem::TooLong {
                    limit: LENGTH_LIMIT,
                },
            ));
        }
        let mut parser = Self {
            builder,
            text,
            tokens: tokens(text)?,
            next: 0,
            depth: 0,
        };
        if parser.peek().kind == Kind::End {
            return Err(FormulaError::new(
                Span::new(0, text.len()),
                FormulaProblem::Empty,
            ));
        }
        let operand = parser.expression(SUM)?;
        if parser.peek().kind == Kind::End {
            Ok(operand)
        } else {
            Err(parser.expected("an operator"))
        }
    }

    fn peek(&self) -> Token {
        // The last token is End and is never passed.
        self.tokens[self.next.min(self.tokens.len() - 1)]
    }

    fn advance(&mut self) -> Token {
        let token = self.peek();
        self.next += 1;
        token
    }

    fn text(&self, span: Span) -> &'b str {
        &self.text[span.start..span.end]
    }

    fn expected(&self, what: &'static str) -> FormulaError {
        let token = self.peek();
        let found = match token.kind {
            Kind::End => "the end of the formula".to_owned(),
            _ => format!("`{}`", self.text(token.span)),
        };
        FormulaError::new(token.span, FormulaProblem::Expected { what, found })
    }

    /// A chain of operators that bind at least as strongly as `strength`.
    fn expression(&mut self, strength: u8) -> Result<Operand, FormulaError> {
        self.depth += 1;
        if self.depth > DEPTH_LIMIT {
            return Err(FormulaError::new(
                self.peek().span,
                FormulaProblem::TooDeep { limit: DEPTH_LIMIT },
            ));
        }
        let start = self.peek().span.start;
        let mut left = self.operand()?;
        while let Some((binary, binds, right_binds)) = infix(self.peek().kind) {
            if binds < strength {
                break;
            }
            let operator = self.advance();
            if self.peek().kind == Kind::Star && operator.kind == Kind::Star {
                let span = Span::new(operator.span.start, self.peek().span.end);
                return Err(FormulaError::new(span, FormulaProblem::DoubleStar));
            }
            let right = self.expression(right_binds)?;
            let span = Span::new(start, self.end_of_last());
            left = self.binary(binary, left, right, span)?;
        }
        self.depth -= 1;
        Ok(left)
    }

    fn end_of_last(&self) -> usize {
        self.tokens[self.next.saturating_sub(1)].span.end
    }

    fn operand(&mut self) -> Result<Operand, FormulaError> {
        let token = self.peek();
        match token.kind {
            Kind::Number(value) => {
                self.next += 1;
                Ok(Operand::Constant(value))
            }
            Kind::Minus => {
                self.next += 1;
                let inner = self.expression(SIGN)?;
                Ok(self.negate(inner, Span::new(token.span.start, self.end_of_last())))
            }
            Kind::Plus => {
                self.next += 1;
                self.expression(SIGN)
            }
            Kind::Open => {
                self.next += 1;
                let inner = self.expression(SUM)?;
                if self.peek().kind != Kind::Close {
                    return Err(self.expected("an operator or `)`"));
                }
                self.next += 1;
                Ok(inner)
            }
            Kind::Name => {
                self.next += 1;
                self.name(token)
            }
            _ => Err(self.expected("a number, a name or `(`")),
        }
    }

    fn name(&mut self, token: Token) -> Result<Operand, FormulaError> {
        let name = self.text(token.span);
        let called = self.peek().kind == Kind::Open;
        let arguments = arity(name);
        if let (Some(count), true) = (arguments, called) {
            return self.call(token, count);
        }
        let value = if name == "pi" {
            Some(Operand::Constant(std::f64::consts::PI))
        } else if let Some(index) = self
            .builder
            .variables
            .iter()
            .position(|&known| known == name)
        {
            Some(Operand::Slot(index))
        } else {
            self.builder.scope.get(name).map(Operand::Constant)
        };
        let problem = match (value, called) {
            (Some(value), false) => return Ok(value),
            (Some(_), true) => FormulaProblem::NotAFunction { name: name.into() },
            (None, _) if arguments.is_some() => FormulaProblem::NoArguments { name: name.into() },
            (None, true) => FormulaProblem::UnknownFunction { name: name.into() },
            (None, false) => FormulaProblem::UnknownName {
                name: name.into(),
                known: self.known_names(),
            },
        };
        Err(FormulaError::new(token.span, problem))
    }

    fn known_names(&self) -> Vec<String> {
        let variables = self.builder.variables.iter().map(|&name| name.to_owned());
        variables
            .chain(self.builder.scope.names().map(str::to_owned))
            .chain(std::iter::once("pi".to_owned()))
            .collect()
    }

    fn call(&mut self, token: Token, count: usize) -> Result<Operand, FormulaError> {
        let name = self.text(token.span);
        self.next += 1;
        let mut arguments = Vec::new();
        if self.peek().kind != Kind::Close {
            arguments.push(self.expression(SUM)?);
            while self.peek().kind == Kind::Comma {
                self.next += 1;
                arguments.push(self.expression(SUM)?);
            }
        }
        if self.peek().kind != Kind::Close {
            return Err(self.expected("an operator, `,` or `)`"));
        }
        self.next += 1;
        let span = Span::new(token.span.start, self.end_of_last());
        if let Some((_, function)) = Function::NAMES.iter().find(|(known, _)| *known == name)
            && let [argument] = arguments[..]
        {
            return self.apply(*function, argument, span);
        }
        if let Some((_, binary)) = Binary::NAMES.iter().find(|(known, _)| *known == name)
            && let [a, b] = arguments[..]
        {
            return self.binary(*binary, a, b, span);
        }
        Err(FormulaError::new(
            span,
            FormulaProblem::ArgumentCount {
                name: name.to_owned(),
                expected: count,
                found: arguments.len(),
            },
        ))
    }

    fn origin(&self, span: Span) -> Origin {
        Origin {
            formula: self.builder.outputs.len(),
            span,
        }
    }

    fn negate(&mut self, inner: Operand, span: Span) -> Operand {
        match inner {
            // Adding zero turns -0 into 0, so that equal constants are equal bit by bit.
            Operand::Constant(value) => Operand::Constant(-value + 0.0),
            Operand::Slot(slot) => {
                let origin = self.origin(span);
                Operand::Slot(self.builder.push(Operation::Negate(slot), origin))
            }
        }
    }

    fn apply(
        &mut self,
        function: Function,
        argument: Operand,
        span: Span,
    ) -> Result<Operand, FormulaError> {
        match argument {
            Operand::Constant(value) => finite(function.value(value), span, || {
                format!("{}({value})", function.name())
            }),
            Operand::Slot(slot) => {
                let origin = self.origin(span);
                Ok(Operand::Slot(
                    self.builder.push_function(function, slot, origin),
                ))
            }
        }
    }

    fn binary(
        &mut self,
        binary: Binary,
        a: Operand,
        b: Operand,
        span: Span,
    ) -> Result<Operand, FormulaError> {
        use Operand::{Constant, Slot};
        if let (Binary::Divide, Constant(0.0)) = (binary, b) {
            return Err(FormulaError::new(span, FormulaProblem::DivisionByZero));
        }
        let origin = self.origin(span);
        let operation = match (binary, a, b) {
            (_, Constant(x), Constant(y)) => {
                return finite(binary.evaluate(&x, &y), span, || written(binary, x, y));
            }
            (Binary::Add, Slot(x), Constant(c)) | (Binary::Add, Constant(c), Slot(x)) => {
                Operation::Offset(x, c)
            }
            (Binary::Subtract, Slot(x), Constant(c)) => Operation::Offset(x, -c + 0.0),
            (Binary::Multiply, Slot(x), Constant(c)) | (Binary::Multiply, Constant(c), Slot(x)) => {
                Operation::Scale(x, c)
            }
            (Binary::Power, Slot(x), Constant(c)) => Operation::Power(x, c),
            _ => {
                let a = self.builder.slot(a, origin);
                let b = self.builder.slot(b, origin);
                Operation::Binary(binary, a, b)
            }
        };
        Ok(Slot(self.builder.push(operation, origin)))
    }
}

/// Operation, its binding strength, and the least strength of what stands on its right; only the power groups to the right.
fn infix(kind: Kind) -> Option<(Binary, u8, u8)> {
    Some(match kind {
        Kind::Plus => (Binary::Add, SUM, SUM + 1),
        Kind::Minus => (Binary::Subtract, SUM, SUM + 1),
        Kind::Star => (Binary::Multiply, PRODUCT, PRODUCT + 1),
        Kind::Slash => (Binary::Divide, PRODUCT, PRODUCT + 1),
        Kind::Caret => (Binary::Power, POWER, POWER),
        _ => return None,
    })
}

/// Number of arguments of a function, if there is one of this name.
pub(super) fn arity(name: &str) -> Option<usize> {
    let one = Function::NAMES.iter().any(|(known, _)| *known == name);
    let two = Binary::NAMES.iter().any(|(known, _)| *known == name);
    one.then_some(1).or(two.then_some(2))
}

fn finite(
    value: f64,
    span: Span,
    operation: impl FnOnce() -> String,
) -> Result<Operand, FormulaError> {
    if value.is_finite() {
        // Adding zero turns -0 into 0, so that equal constants are equal bit by bit.
        Ok(Operand::Constant(value + 0.0))
    } else {
        Err(FormulaError::new(
            span,
            FormulaProblem::NotFinite {
                operation: operation(),
            },
        ))
    }
}

fn written(binary: Binary, x: f64, y: f64) -> String {
    let symbol = match binary {
        Binary::Add => "+",
        Binary::Subtract => "-",
        Binary::Multiply => "*",
        Binary::Divide => "/",
        Binary::Power => "^",
        named => {
            let name = Binary::NAMES
                .iter()
                .find(|(_, known)| *known == named)
                .map_or("?", |(name, _)| name);
            return format!("{name}({x}, {y})");
        }
    };
    format!("({x}) {symbol} ({y})")
}
