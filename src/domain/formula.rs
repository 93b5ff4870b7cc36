//! Formulas of numeric tests in exact decimals.
//!
//! Grammar: `+ − × ÷` (also `- * /`), parentheses, a sign before a factor, numbers with a point, input codes.
//! `×` and `÷` bind before `+` and `−`; equals are read from the left.
//!
//! **Division.** The whole formula is computed as one exact fraction, and divided out once, at the end, to 28
//! digits: 1 ÷ 3 × 3 is 1. Only where numerator or denominator would leave 38 digits is each step taken in
//! decimals of 28 digits instead.

use rust_decimal::Decimal;

use super::method::{Formula, Halves, Input};
use super::refusal::NamedReason;
use super::rounding::to_decimals;

/// Why a formula cannot be used, or gives no value.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum FormulaFault {
    #[error("The formula is empty. Write it with the input codes, such as weight × 100 ÷ volume.")]
    FormulaEmpty,
    #[error("The formula has {0} characters; at most 500 fit.")]
    FormulaTooLong(usize),
    #[error("The formula uses “{0}”, which is no input. Add it to the inputs or correct the name.")]
    UnknownInput(String),
    #[error("“{0}” cannot stand in a formula. Use + − × ÷, parentheses, numbers and input codes.")]
    UnknownSign(char),
    #[error("The formula breaks off: a number or an input is missing {0}.")]
    OperandMissing(String),
    #[error("The formula goes on with “{0}” where + − × ÷ or its end is awaited.")]
    OperatorMissing(String),
    #[error("A parenthesis is opened and not closed.")]
    ParenthesisOpen,
    #[error("The formula has more than 40 parentheses inside each other.")]
    NestedTooDeep,
    #[error("“{0}” is not a number. Write it with one point, such as 0.5.")]
    NumberUnreadable(String),
    #[error("The formula divides by 0 with these values.")]
    DivisionByZero,
    #[error("The result has more digits than can be kept exactly.")]
    ResultTooLarge,
    #[error("The input “{0}” has no value.")]
    InputMissing(String),
}

/// A worked example that does not reproduce.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum FormulaRefusal {
    #[error("{0}")]
    FormulaUnusable(FormulaFault),
    #[error("The worked example has no value for the input “{0}”. Give it one.")]
    ExampleIncomplete(String),
    #[error(
        "The worked example gives {computed}, not {stated}. Correct the formula, its inputs or the stated \
         result."
    )]
    ExampleNotReproduced { stated: Decimal, computed: Decimal },
}

impl NamedReason for FormulaRefusal {
    fn field(&self) -> Option<String> {
        match self {
            FormulaRefusal::FormulaUnusable(_) => Some("formula".to_string()),
            FormulaRefusal::ExampleIncomplete(_) | FormulaRefusal::ExampleNotReproduced { .. } => {
                Some("example_result".to_string())
            }
        }
    }
}

/// A formula that was read and whose inputs are all known.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Expression(Term);

#[derive(Clone, Debug, PartialEq, Eq)]
enum Term {
    Number(Decimal),
    Input(String),
    Negative(Box<Term>),
    Pair(Box<Term>, Sign, Box<Term>),
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Sign {
    Plus,
    Minus,
    Times,
    Over,
}

#[derive(Clone, Debug, PartialEq, Eq)]
enum Token {
    Number(Decimal),
    Word(String),
    Sign(Sign),
    Open,
    Close,
}

impl Token {
    fn shown(&self) -> String {
        match self {
            Token::Number(value) => value.to_string(),
            Token::Word(word) => word.clone(),
            Token::Sign(Sign::Plus) => "+".to_string(),
            Token::Sign(Sign::Minus) => "−".to_string(),
            Token::Sign(Sign::Times) => "×".to_string(),
            Token::Sign(Sign::Over) => "÷".to_string(),
            Token::Open => "(".to_string(),
            Token::Close => ")".to_string(),
        }
    }
}

fn tokens(text: &str) -> Result<Vec<Token>, FormulaFault> {
    let mut found = Vec::new();
    let mut rest = text;
    while let Some(next) = rest.chars().next() {
        let taken = match next {
            c if c.is_whitespace() => c.len_utf8(),
            c if c.is_ascii_digit() || c == '.' => {
                let end = rest.find(|c: char| !c.is_ascii_digit() && c != '.').unwrap_or(rest.len());
                let fault = || FormulaFault::NumberUnreadable(rest[..end].to_string());
                if rest[..end].starts_with('.') || rest[..end].ends_with('.') {
                    return Err(fault());
                }
                found.push(Token::Number(Decimal::from_str_exact(&rest[..end]).map_err(|_| fault())?));
                end
            }
            c if c.is_alphabetic() || c == '_' => {
                let end = rest.find(|c: char| !c.is_alphanumeric() && c != '_').unwrap_or(rest.len());
                found.push(Token::Word(rest[..end].to_string()));
                end
            }
            c => {
                found.push(sign(c).ok_or(FormulaFault::UnknownSign(c))?);
                c.len_utf8()
            }
        };
        rest = &rest[taken..];
    }
    Ok(found)
}

fn sign(c: char) -> Option<Token> {
    Some(match c {
        '+' => Token::Sign(Sign::Plus),
        '-' | '\u{2212}' => Token::Sign(Sign::Minus),
        '*' | '×' | '·' => Token::Sign(Sign::Times),
        '/' | '÷' => Token::Sign(Sign::Over),
        '(' => Token::Open,
        ')' => Token::Close,
        _ => return None,
    })
}

/// Reads tokens from the left; `depth` keeps a hostile formula from exhausting the stack.
struct Parser<'a> {
    tokens: std::iter::Peekable<std::vec::IntoIter<Token>>,
    inputs: &'a [&'a str],
    depth: u32,
}

impl Parser<'_> {
    fn sum(&mut self) -> Result<Term, FormulaFault> {
        self.chain(&[Sign::Plus, Sign::Minus], Parser::product)
    }

    fn product(&mut self) -> Result<Term, FormulaFault> {
        self.chain(&[Sign::Times, Sign::Over], Parser::factor)
    }

    fn chain(
        &mut self,
        signs: &[Sign],
        next: fn(&mut Self) -> Result<Term, FormulaFault>,
    ) -> Result<Term, FormulaFault> {
        let mut left = next(self)?;
        while let Some(Token::Sign(sign)) = self.tokens.peek().cloned() {
            if !signs.contains(&sign) {
                break;
            }
            self.tokens.next();
            left = Term::Pair(Box::new(left), sign, Box::new(next(self)?));
        }
        Ok(left)
    }

    fn factor(&mut self) -> Result<Term, FormulaFault> {
        match self.tokens.next() {
            Some(Token::Number(value)) => Ok(Term::Number(value)),
            Some(Token::Word(word)) if self.inputs.contains(&word.as_str()) => Ok(Term::Input(word)),
            Some(Token::Word(word)) => Err(FormulaFault::UnknownInput(word)),
            Some(Token::Sign(Sign::Minus)) => {
                let inner = self.deeper(Parser::factor)?;
                Ok(Term::Negative(Box::new(inner)))
            }
            Some(Token::Open) => {
                let inner = self.deeper(Parser::sum)?;
                match self.tokens.next() {
                    Some(Token::Close) => Ok(inner),
                    Some(other) => Err(FormulaFault::OperatorMissing(other.shown())),
                    None => Err(FormulaFault::ParenthesisOpen),
                }
            }
            Some(other) => Err(FormulaFault::OperandMissing(format!("before “{}”", other.shown()))),
            None => Err(FormulaFault::OperandMissing("at the end".to_string())),
        }
    }

    fn deeper(&mut self, next: fn(&mut Self) -> Result<Term, FormulaFault>) -> Result<Term, FormulaFault> {
        if self.depth >= 40 {
            return Err(FormulaFault::NestedTooDeep);
        }
        self.depth += 1;
        let found = next(self);
        self.depth -= 1;
        found
    }
}

impl Expression {
    /// Reads a formula over these input codes.
    pub fn parse(text: &str, inputs: &[&str]) -> Result<Expression, FormulaFault> {
        let length = text.chars().count();
        if length > 500 {
            return Err(FormulaFault::FormulaTooLong(length));
        }
        let tokens = tokens(text)?;
        if tokens.is_empty() {
            return Err(FormulaFault::FormulaEmpty);
        }
        let mut parser = Parser { tokens: tokens.into_iter().peekable(), inputs, depth: 0 };
        let term = parser.sum()?;
        match parser.tokens.next() {
            Some(more) => Err(FormulaFault::OperatorMissing(more.shown())),
            None => Ok(Expression(term)),
        }
    }

    /// The value for these inputs, exact up to the one division at the end.
    pub fn evaluate(&self, value: &dyn Fn(&str) -> Option<Decimal>) -> Result<Decimal, FormulaFault> {
        if let Some(fraction) = fraction_of(&self.0, value)?
            && let Some(exact) = fraction.divided()
        {
            return Ok(exact);
        }
        decimal_of(&self.0, value).map(|result| result.normalize())
    }
}

/// An exact fraction; the denominator is above 0 and shares no factor with the numerator.
#[derive(Clone, Copy)]
struct Fraction {
    over: i128,
    under: i128,
}

impl Fraction {
    fn new(over: i128, under: i128) -> Option<Fraction> {
        let shared = i128::try_from(common(over.unsigned_abs(), under.unsigned_abs())).ok()?;
        if shared == 0 {
            return None;
        }
        let (over, under) = (over / shared, under / shared);
        if under < 0 {
            return Some(Fraction { over: over.checked_neg()?, under: under.checked_neg()? });
        }
        Some(Fraction { over, under })
    }

    fn of(value: Decimal) -> Option<Fraction> {
        Fraction::new(value.mantissa(), 10i128.checked_pow(value.scale())?)
    }

    fn with(self, sign: Sign, other: Fraction) -> Option<Fraction> {
        match sign {
            Sign::Times => {
                Fraction::new(self.over.checked_mul(other.over)?, self.under.checked_mul(other.under)?)
            }
            Sign::Over => {
                Fraction::new(self.over.checked_mul(other.under)?, self.under.checked_mul(other.over)?)
            }
            Sign::Plus | Sign::Minus => {
                let right = other.over.checked_mul(self.under)?;
                let right = if sign == Sign::Minus { right.checked_neg()? } else { right };
                let over = self.over.checked_mul(other.under)?.checked_add(right)?;
                Fraction::new(over, self.under.checked_mul(other.under)?)
            }
        }
    }

    fn divided(self) -> Option<Decimal> {
        let over = Decimal::try_from_i128_with_scale(self.over, 0).ok()?;
        let under = Decimal::try_from_i128_with_scale(self.under, 0).ok()?;
        over.checked_div(under).map(|value| value.normalize())
    }
}

/// Greatest common divisor (Euclid).
fn common(mut a: u128, mut b: u128) -> u128 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a
}

/// `Ok(None)` where the digits do not suffice.
fn fraction_of(
    term: &Term,
    value: &dyn Fn(&str) -> Option<Decimal>,
) -> Result<Option<Fraction>, FormulaFault> {
    match term {
        Term::Number(number) => Ok(Fraction::of(*number)),
        Term::Input(code) => {
            let number = value(code).ok_or_else(|| FormulaFault::InputMissing(code.clone()))?;
            Ok(Fraction::of(number))
        }
        Term::Negative(inner) => Ok(fraction_of(inner, value)?
            .and_then(|inner| Fraction::new(inner.over.checked_neg()?, inner.under))),
        Term::Pair(left, sign, right) => {
            let (left, right) = (fraction_of(left, value)?, fraction_of(right, value)?);
            if *sign == Sign::Over && right.is_some_and(|right| right.over == 0) {
                return Err(FormulaFault::DivisionByZero);
            }
            Ok(left.zip(right).and_then(|(left, right)| left.with(*sign, right)))
        }
    }
}

fn decimal_of(term: &Term, value: &dyn Fn(&str) -> Option<Decimal>) -> Result<Decimal, FormulaFault> {
    match term {
        Term::Number(number) => Ok(*number),
        Term::Input(code) => value(code).ok_or_else(|| FormulaFault::InputMissing(code.clone())),
        Term::Negative(inner) => Ok(-decimal_of(inner, value)?),
        Term::Pair(left, sign, right) => {
            let (left, right) = (decimal_of(left, value)?, decimal_of(right, value)?);
            let result = match sign {
                Sign::Plus => left.checked_add(right),
                Sign::Minus => left.checked_sub(right),
                Sign::Times => left.checked_mul(right),
                Sign::Over if right.is_zero() => return Err(FormulaFault::DivisionByZero),
                Sign::Over => left.checked_div(right),
            };
            result.ok_or(FormulaFault::ResultTooLarge)
        }
    }
}

/// The worked example must give its stated result, rounded to the decimals it is stated with.
///
/// Refuses in this order: the formula, an input without a value, another result.
pub fn example_reproduces(formula: &Formula, inputs: &[Input], halves: Halves) -> Result<(), FormulaRefusal> {
    let codes: Vec<&str> = inputs.iter().map(|input| input.code.as_str()).collect();
    let expression =
        Expression::parse(&formula.expression, &codes).map_err(FormulaRefusal::FormulaUnusable)?;
    let given =
        |code: &str| formula.example_inputs.iter().find(|(known, _)| known == code).map(|(_, value)| *value);
    if let Some(code) = codes.iter().find(|code| given(code).is_none()) {
        return Err(FormulaRefusal::ExampleIncomplete((*code).to_string()));
    }
    let computed = expression.evaluate(&given).map_err(FormulaRefusal::FormulaUnusable)?;
    let stated = formula.example_result;
    let computed = to_decimals(computed, stated.scale(), halves);
    if computed != stated {
        return Err(FormulaRefusal::ExampleNotReproduced { stated, computed });
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn value(code: &str) -> Option<Decimal> {
        let table = [("a", "2.5"), ("b", "0.4"), ("zero", "0"), ("weight", "250.12")];
        table.iter().find(|(known, _)| *known == code).map(|(_, text)| text.parse().unwrap())
    }

    fn result(text: &str) -> Result<String, FormulaFault> {
        let expression = Expression::parse(text, &["a", "b", "zero", "weight", "unset"])?;
        expression.evaluate(&value).map(|value| value.to_string())
    }

    #[test]
    fn formulas_are_exact_and_read_from_the_left() {
        let table = [
            ("a + b × 2", "3.3"),
            ("(a + b) * 2", "5.8"),
            ("a − b − 1", "1.1"),
            ("a / b / 5", "1.25"),
            ("a ÷ (b / 5)", "31.25"),
            ("-a + 3", "0.5"),
            ("a × -2", "-5"),
            ("1 / 3 * 3", "1"),
            ("1 ÷ 3 × 292.5", "97.5"),
            ("0.1+0.2", "0.3"),
            ("1/3", "0.3333333333333333333333333333"),
            ("weight × 100 ÷ 250", "100.048"),
        ];
        for (text, expected) in table {
            assert_eq!(result(text).as_deref(), Ok(expected), "{text}");
        }
    }

    #[test]
    fn faults_say_what_to_mend() {
        let table = [
            ("", FormulaFault::FormulaEmpty),
            ("a + c", FormulaFault::UnknownInput("c".to_string())),
            ("a ^ 2", FormulaFault::UnknownSign('^')),
            ("a +", FormulaFault::OperandMissing("at the end".to_string())),
            ("a * ) 2", FormulaFault::OperandMissing("before “)”".to_string())),
            ("a 2", FormulaFault::OperatorMissing("2".to_string())),
            ("(a + 2", FormulaFault::ParenthesisOpen),
            ("1.2.3", FormulaFault::NumberUnreadable("1.2.3".to_string())),
            (".5", FormulaFault::NumberUnreadable(".5".to_string())),
            ("a / zero", FormulaFault::DivisionByZero),
            ("a / (b − 0.4)", FormulaFault::DivisionByZero),
            ("unset", FormulaFault::InputMissing("unset".to_string())),
            ("79228162514264337593543950335 * 79228162514264337593543950335", FormulaFault::ResultTooLarge),
        ];
        for (text, fault) in table {
            assert_eq!(result(text), Err(fault), "{text}");
        }
        assert_eq!(result(&format!("{}a", "(".repeat(60))), Err(FormulaFault::NestedTooDeep));
        assert_eq!(result(&format!("{}a", "-".repeat(60))), Err(FormulaFault::NestedTooDeep));
        assert_eq!(result(&"a+".repeat(300)), Err(FormulaFault::FormulaTooLong(600)));
    }

    #[test]
    fn an_example_reproduces_or_says_what_it_gives() {
        let input = |code: &str| Input {
            code: code.to_string(),
            label: code.to_string(),
            unit: "mg".to_string(),
            decimals: 2,
        };
        let formula = |expression: &str, stated: &str| Formula {
            expression: expression.to_string(),
            example_inputs: vec![
                ("a".to_string(), Decimal::new(25, 1)),
                ("b".to_string(), Decimal::new(4, 1)),
            ],
            example_result: stated.parse().unwrap(),
        };
        let inputs = [input("a"), input("b")];
        let check = |expression: &str, stated: &str| {
            example_reproduces(&formula(expression, stated), &inputs, Halves::AwayFromZero)
        };
        assert_eq!(check("a / b", "6.25"), Ok(()));
        assert_eq!(check("a / b", "6.3"), Ok(()));
        let not = |stated: &str, computed: &str| {
            let (stated, computed) = (stated.parse().unwrap(), computed.parse().unwrap());
            Err(FormulaRefusal::ExampleNotReproduced { stated, computed })
        };
        assert_eq!(check("a / b", "6.26"), not("6.26", "6.25"));
        let even = example_reproduces(&formula("a / b", "6.3"), &inputs, Halves::ToEven);
        assert_eq!(even, not("6.3", "6.2"));
        let three = [input("a"), input("b"), input("c")];
        let incomplete = example_reproduces(&formula("a / b", "6.25"), &three, Halves::AwayFromZero);
        assert_eq!(incomplete, Err(FormulaRefusal::ExampleIncomplete("c".to_string())));
    }

    proptest! {
        /// No text makes the parser panic, and sums of typed decimals are exact.
        #[test]
        fn any_text_is_answered(text in "[-+*/().0-9ab ×÷−]{0,40}") {
            let _ = result(&text);
        }

        #[test]
        fn dividing_and_multiplying_back_loses_nothing(
            a in 1i64..1_000_000_000, b in 1i64..1_000_000_000, scale in 0u32..6,
        ) {
            let (a, b) = (Decimal::new(a, scale), Decimal::new(b, scale));
            let expression = Expression::parse("a / b * b", &["a", "b"]).unwrap();
            let back = expression.evaluate(&|code| Some(if code == "a" { a } else { b })).unwrap();
            prop_assert_eq!(back, a);
        }
    }
}
