//! From words to a tree, by precedence.

use super::expr::{Call, Expr, Form, Infix, Prefix, binding};
use super::token::{Token, Word, tokens};
use crate::place::{Fault, Faults, Place, Text};
use std::ops::Range;

/// Operations that may stand inside one another; keeps every walk over a tree within the stack.
pub(super) const DEEPEST: usize = 200;

/// Reads a formula. Faults of several arguments are found in one go.
pub fn parse(text: &Text, faults: &mut Faults) -> Option<Expr> {
    let tokens = tokens(text, faults)?;
    if tokens.len() == 1 {
        faults.push(
            Fault::at(text.place.clone(), "this formula is empty").label("a formula is needed"),
        );
        return None;
    }
    let mut parser = Parser {
        text,
        tokens,
        at: 0,
        nested: 0,
        faults,
        good: true,
    };
    let expr = parser.expression(0).ok()?;
    if *parser.word() != Word::End {
        parser.unexpected("an operation such as `+`, or the end");
        return None;
    }
    parser.good.then_some(expr)
}

struct Parser<'a> {
    text: &'a Text,
    tokens: Vec<Token>,
    at: usize,
    nested: usize,
    faults: &'a mut Faults,
    good: bool,
}

/// A fault has been pushed.
struct Wrong;
type Parsed<T> = Result<T, Wrong>;

impl Parser<'_> {
    fn word(&self) -> &Word {
        &self.tokens[self.at].word
    }

    fn span(&self) -> Range<usize> {
        self.tokens[self.at].span.clone()
    }

    fn place(&self, span: Range<usize>) -> Place {
        self.text.place_of(span)
    }

    fn take(&mut self) -> Token {
        let token = self.tokens[self.at].clone();
        if token.word != Word::End {
            self.at += 1;
        }
        token
    }

    fn took(&mut self, word: &Word) -> bool {
        let found = self.word() == word;
        if found {
            self.at += 1;
        }
        found
    }

    fn fault(&mut self, fault: Fault) -> Wrong {
        self.faults.push(fault);
        self.good = false;
        Wrong
    }

    fn unexpected(&mut self, wanted: &str) -> Wrong {
        let span = self.span();
        let fault = if *self.word() == Word::End {
            let end = self.text.text.len();
            let last = self
                .text
                .text
                .char_indices()
                .next_back()
                .map_or(0, |(at, _)| at);
            Fault::at(self.place(last..end), "the formula ends too early")
                .label(format!("after this, {wanted} is needed"))
        } else {
            let found = &self.text.text[span.clone()];
            let mut fault = Fault::at(
                self.place(span.clone()),
                format!("`{found}` cannot stand here"),
            )
            .label(format!("{wanted} is needed"));
            if *self.word() == Word::Is {
                fault = fault.help("write `==` to compare");
            }
            if *self.word() == Word::Comma {
                fault = fault.help("write decimals with a point; a comma stands between arguments");
            }
            fault
        };
        self.fault(fault)
    }

    fn node(&mut self, form: Form, span: Range<usize>) -> Parsed<Expr> {
        let depth = 1 + match &form {
            Form::Prefix(_, a) => a.depth,
            Form::Infix(_, a, b) => a.depth.max(b.depth),
            Form::Index { of, at } => at.iter().map(|part| part.depth).fold(of.depth, usize::max),
            Form::List(items) => items.iter().map(|item| item.depth).max().unwrap_or(0),
            Form::Call(call) => {
                let named = call.named.iter().map(|(_, _, part)| part.depth);
                call.arguments
                    .iter()
                    .map(|part| part.depth)
                    .chain(named)
                    .max()
                    .unwrap_or(0)
            }
            _ => 0,
        };
        if depth > DEEPEST {
            return Err(self.too_deep(span));
        }
        let place = self.place(span);
        Ok(Expr { form, place, depth })
    }

    fn too_deep(&mut self, span: Range<usize>) -> Wrong {
        let fault = Fault::at(
            self.place(span),
            format!("more than {DEEPEST} operations stand one inside the other in this formula"),
        )
        .label("too deep")
        .help("give parts of it names under [model.define]");
        self.fault(fault)
    }

    /// An expression whose operations bind at least as tightly as `least`.
    fn expression(&mut self, least: u8) -> Parsed<Expr> {
        self.nested += 1;
        if self.nested > DEEPEST {
            let span = self.span();
            return Err(self.too_deep(span));
        }
        let start = self.span().start;
        let mut left = self.operand(least)?;
        while let Some(infix) = infix(self.word()) {
            let (own, _, right_least) = infix.bindings();
            if own < least {
                break;
            }
            self.take();
            let right = self.expression(right_least)?;
            let end = self.tokens[self.at - 1].span.end;
            left = self.node(
                Form::Infix(infix, Box::new(left), Box::new(right)),
                start..end,
            )?;
            if own == binding::COMPARE
                && let Some(next) = self::infix(self.word())
                && next.bindings().0 == binding::COMPARE
            {
                let fault = Fault::at(self.place(self.span()), "comparisons do not chain")
                    .label("second comparison")
                    .help("write `0 < x and x < 1`");
                return Err(self.fault(fault));
            }
        }
        self.nested -= 1;
        Ok(left)
    }

    fn operand(&mut self, least: u8) -> Parsed<Expr> {
        let start = self.span().start;
        let prefix = match self.word() {
            Word::Minus if least <= binding::NEGATE => (Prefix::Negate, binding::NEGATE),
            Word::Not if least <= binding::NOT => (Prefix::Not, binding::NOT),
            Word::Not => {
                let fault = Fault::at(
                    self.place(self.span()),
                    "`not` binds less tightly than what stands before it",
                )
                .label("needs brackets")
                .help("put brackets around `not …`");
                return Err(self.fault(fault));
            }
            Word::Plus => {
                self.unexpected("a value");
                return Err(Wrong);
            }
            _ => return self.postfix(),
        };
        self.take();
        let operand = self.expression(prefix.1)?;
        let end = self.tokens[self.at - 1].span.end;
        self.node(Form::Prefix(prefix.0, Box::new(operand)), start..end)
    }

    /// A value, then any `[…]`.
    fn postfix(&mut self) -> Parsed<Expr> {
        let start = self.span().start;
        let mut of = self.atom()?;
        while self.took(&Word::OpenIndex) {
            let mut at = Vec::new();
            loop {
                at.push(self.expression(0)?);
                if !self.took(&Word::Comma) {
                    break;
                }
            }
            if !self.took(&Word::CloseIndex) {
                return Err(self.unexpected("`]`"));
            }
            let end = self.tokens[self.at - 1].span.end;
            of = self.node(
                Form::Index {
                    of: Box::new(of),
                    at,
                },
                start..end,
            )?;
        }
        Ok(of)
    }

    fn atom(&mut self) -> Parsed<Expr> {
        let Token { word, span } = self.tokens[self.at].clone();
        match word {
            Word::Number(value) => {
                self.take();
                self.node(Form::Number(value), span)
            }
            Word::Text(label) => {
                self.take();
                self.node(Form::Label(label), span)
            }
            Word::Open => {
                self.take();
                let inner = self.expression(0)?;
                if !self.took(&Word::Close) {
                    return Err(self.unexpected("`)`"));
                }
                Ok(inner)
            }
            Word::OpenIndex => self.list(span),
            Word::Name(name) => {
                self.take();
                match self.word() {
                    Word::Open => self.call(name, span),
                    Word::Dot => {
                        self.take();
                        let Word::Name(column) = self.word().clone() else {
                            return Err(self.unexpected("the name of a column"));
                        };
                        let end = self.take().span.end;
                        self.node(
                            Form::Column {
                                table: name,
                                column,
                            },
                            span.start..end,
                        )
                    }
                    _ => self.node(Form::Name(name), span),
                }
            }
            _ => Err(self.unexpected("a value")),
        }
    }

    /// `[a, b, …]`
    fn list(&mut self, span: Range<usize>) -> Parsed<Expr> {
        self.take();
        let mut items = Vec::new();
        loop {
            items.push(self.expression(0)?);
            if !self.took(&Word::Comma) {
                break;
            }
        }
        if !self.took(&Word::CloseIndex) {
            return Err(self.unexpected("`,` or `]`"));
        }
        let end = self.tokens[self.at - 1].span.end;
        self.node(Form::List(items), span.start..end)
    }

    /// What follows a name and an opening bracket.
    fn call(&mut self, name: String, span: Range<usize>) -> Parsed<Expr> {
        let name_place = self.place(span.clone());
        self.take();
        let (mut arguments, mut named) = (Vec::new(), Vec::new());
        let mut good = true;
        while *self.word() != Word::Close {
            let before = self.nested;
            if self.argument(&mut arguments, &mut named).is_err() {
                good = false;
                self.nested = before;
                self.skip_argument();
            }
            if !self.took(&Word::Comma) {
                break;
            }
        }
        if !self.took(&Word::Close) {
            return Err(if good {
                self.unexpected("`,` or `)`")
            } else {
                Wrong
            });
        }
        if !good {
            return Err(Wrong);
        }
        let end = self.tokens[self.at - 1].span.end;
        let call = Call {
            name,
            name_place,
            arguments,
            named,
        };
        self.node(Form::Call(call), span.start..end)
    }

    fn argument(
        &mut self,
        arguments: &mut Vec<Expr>,
        named: &mut Vec<(String, Place, Expr)>,
    ) -> Parsed<()> {
        if let Word::Name(key) = self.word().clone()
            && self.tokens[self.at + 1].word == Word::Is
        {
            let place = self.place(self.span());
            self.take();
            self.take();
            let value = self.expression(0)?;
            if let Some((_, first, _)) = named.iter().find(|(other, ..)| *other == key) {
                let fault = Fault::at(place, format!("`{key}` is given twice"))
                    .label("second time")
                    .related(first.clone(), "first time");
                return Err(self.fault(fault));
            }
            named.push((key, place, value));
            return Ok(());
        }
        let value = self.expression(0)?;
        if !named.is_empty() {
            let fault = Fault::at(
                value.place,
                "an argument without a name stands after one with a name",
            )
            .label("needs a name")
            .help("laws take named arguments, functions take none; to compare, write `==`");
            return Err(self.fault(fault));
        }
        arguments.push(value);
        Ok(())
    }

    /// Goes on to the comma or bracket that ends a broken argument.
    fn skip_argument(&mut self) {
        let mut open = 0;
        loop {
            match self.word() {
                Word::End => return,
                Word::Comma | Word::Close if open == 0 => return,
                Word::Open | Word::OpenIndex => open += 1,
                Word::Close | Word::CloseIndex => open = (open - 1).max(0),
                _ => {}
            }
            self.at += 1;
        }
    }
}

fn infix(word: &Word) -> Option<Infix> {
    Some(match word {
        Word::Plus => Infix::Add,
        Word::Minus => Infix::Subtract,
        Word::Star => Infix::Multiply,
        Word::Slash => Infix::Divide,
        Word::Caret => Infix::Power,
        Word::Equal => Infix::Equal,
        Word::NotEqual => Infix::NotEqual,
        Word::Less => Infix::Less,
        Word::LessEqual => Infix::LessEqual,
        Word::Greater => Infix::Greater,
        Word::GreaterEqual => Infix::GreaterEqual,
        Word::And => Infix::And,
        Word::Or => Infix::Or,
        _ => return None,
    })
}
