//! The tree of a formula, and its canonical text.

use crate::place::Place;
use std::fmt;

/// A formula or a part of one. Two are equal when they say the same; places do not count.
#[derive(Debug, Clone)]
pub struct Expr {
    pub form: Form,
    pub place: Place,
    /// Operations from here to the deepest leaf.
    pub(super) depth: usize,
}

impl PartialEq for Expr {
    fn eq(&self, other: &Expr) -> bool {
        self.form == other.form
    }
}

#[derive(Debug, Clone, PartialEq)]
pub enum Form {
    Number(f64),
    Name(String),
    /// `table.column`
    Column {
        table: String,
        column: String,
    },
    /// A label in quotation marks.
    Label(String),
    Prefix(Prefix, Box<Expr>),
    Infix(Infix, Box<Expr>, Box<Expr>),
    /// `of[at]`, `of[at, at]`
    Index {
        of: Box<Expr>,
        at: Vec<Expr>,
    },
    Call(Call),
    /// `[a, b, …]`: at least one.
    List(Vec<Expr>),
}

/// `name(arguments)`, `name(key = value, …)`, or first the one, then the other.
#[derive(Debug, Clone)]
pub struct Call {
    pub name: String,
    pub name_place: Place,
    pub arguments: Vec<Expr>,
    pub named: Vec<(String, Place, Expr)>,
}

impl PartialEq for Call {
    fn eq(&self, other: &Call) -> bool {
        let named = |call: &Call| -> Vec<(String, Expr)> {
            let pair = |(name, _, value): &(String, Place, Expr)| (name.clone(), value.clone());
            call.named.iter().map(pair).collect()
        };
        self.name == other.name && self.arguments == other.arguments && named(self) == named(other)
    }
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Prefix {
    Negate,
    Not,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Infix {
    Add,
    Subtract,
    Multiply,
    Divide,
    Power,
    Equal,
    NotEqual,
    Less,
    LessEqual,
    Greater,
    GreaterEqual,
    And,
    Or,
}

/// How tightly an operation binds; operands that bind less tightly stand in brackets.
pub(super) mod binding {
    pub const OR: u8 = 1;
    pub const AND: u8 = 2;
    pub const NOT: u8 = 3;
    pub const COMPARE: u8 = 4;
    pub const ADD: u8 = 5;
    pub const MULTIPLY: u8 = 6;
    pub const NEGATE: u8 = 7;
    pub const POWER: u8 = 8;
    pub const ATOM: u8 = 9;
}

impl Infix {
    pub fn sign(self) -> &'static str {
        match self {
            Infix::Add => "+",
            Infix::Subtract => "-",
            Infix::Multiply => "*",
            Infix::Divide => "/",
            Infix::Power => "^",
            Infix::Equal => "==",
            Infix::NotEqual => "!=",
            Infix::Less => "<",
            Infix::LessEqual => "<=",
            Infix::Greater => ">",
            Infix::GreaterEqual => ">=",
            Infix::And => "and",
            Infix::Or => "or",
        }
    }

    /// Its own binding, and the least binding that its left and right operands need.
    pub(super) fn bindings(self) -> (u8, u8, u8) {
        use binding::*;
        match self {
            Infix::Or => (OR, OR, AND),
            Infix::And => (AND, AND, NOT),
            Infix::Add | Infix::Subtract => (ADD, ADD, MULTIPLY),
            Infix::Multiply | Infix::Divide => (MULTIPLY, MULTIPLY, NEGATE),
            Infix::Power => (POWER, ATOM, NEGATE),
            _ => (COMPARE, ADD, ADD),
        }
    }
}

impl Expr {
    fn binding(&self) -> u8 {
        match &self.form {
            Form::Prefix(Prefix::Negate, _) => binding::NEGATE,
            Form::Prefix(Prefix::Not, _) => binding::NOT,
            Form::Infix(infix, ..) => infix.bindings().0,
            _ => binding::ATOM,
        }
    }

    /// Calls `visit` with every `table.column`, name and called function, in the order of the text.
    pub fn visit<'a>(&'a self, visit: &mut dyn FnMut(&'a Expr)) {
        visit(self);
        match &self.form {
            Form::Prefix(_, a) => a.visit(visit),
            Form::Infix(_, a, b) => {
                a.visit(visit);
                b.visit(visit);
            }
            Form::Index { of, at } => {
                of.visit(visit);
                at.iter().for_each(|part| part.visit(visit));
            }
            Form::List(items) => items.iter().for_each(|item| item.visit(visit)),
            Form::Call(call) => {
                call.arguments.iter().for_each(|part| part.visit(visit));
                call.named.iter().for_each(|(_, _, part)| part.visit(visit));
            }
            Form::Number(_) | Form::Name(_) | Form::Column { .. } | Form::Label(_) => {}
        }
    }

    /// The plain names that this formula needs, each once, in order of first use.
    pub fn names(&self) -> Vec<String> {
        let mut out: Vec<String> = Vec::new();
        self.visit(&mut |part| {
            if let Form::Name(name) = &part.form
                && !out.contains(name)
            {
                out.push(name.clone());
            }
        });
        out
    }
}

/// The shortest text that reads back as the number.
fn number(value: f64) -> String {
    let text = format!("{value:?}");
    match text.strip_suffix(".0") {
        Some(whole) => whole.into(),
        None => text,
    }
}

fn list(f: &mut fmt::Formatter, items: &mut dyn Iterator<Item = String>) -> fmt::Result {
    for (at, item) in items.enumerate() {
        write!(f, "{}{item}", if at == 0 { "" } else { ", " })?;
    }
    Ok(())
}

/// The canonical text: single spaces, no bracket that changes nothing.
impl fmt::Display for Expr {
    fn fmt(&self, f: &mut fmt::Formatter) -> fmt::Result {
        let operand = |f: &mut fmt::Formatter, part: &Expr, least: u8| {
            if part.binding() < least {
                write!(f, "({part})")
            } else {
                write!(f, "{part}")
            }
        };
        match &self.form {
            Form::Number(value) => write!(f, "{}", number(*value)),
            Form::Name(name) => write!(f, "{name}"),
            Form::Column { table, column } => write!(f, "{table}.{column}"),
            Form::Label(label) if label.contains('"') => write!(f, "'{label}'"),
            Form::Label(label) => write!(f, "\"{label}\""),
            Form::Prefix(Prefix::Negate, a) => {
                write!(f, "-")?;
                operand(f, a, binding::NEGATE)
            }
            Form::Prefix(Prefix::Not, a) => {
                write!(f, "not ")?;
                operand(f, a, binding::NOT)
            }
            Form::Infix(infix, a, b) => {
                let (_, left, right) = infix.bindings();
                operand(f, a, left)?;
                if *infix == Infix::Power {
                    write!(f, "^")?;
                } else {
                    write!(f, " {} ", infix.sign())?;
                }
                operand(f, b, right)
            }
            Form::Index { of, at } => {
                operand(f, of, binding::ATOM)?;
                write!(f, "[")?;
                list(f, &mut at.iter().map(Expr::to_string))?;
                write!(f, "]")
            }
            Form::List(items) => {
                write!(f, "[")?;
                list(f, &mut items.iter().map(Expr::to_string))?;
                write!(f, "]")
            }
            Form::Call(call) => {
                write!(f, "{}(", call.name)?;
                let named = call
                    .named
                    .iter()
                    .map(|(name, _, value)| format!("{name} = {value}"));
                list(
                    f,
                    &mut call.arguments.iter().map(Expr::to_string).chain(named),
                )?;
                write!(f, ")")
            }
        }
    }
}
