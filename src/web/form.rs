//! A form: parts in reading order, filled from what was typed, read with every error at once.

use askama::Template;
use chrono::NaiveDate;

use super::field::{Entry, Field};
use super::page::Shell;
use super::reply::{Outcome, Reply, page_with, see};
use super::visit::Visit;
use crate::domain::actor::Actor;
use crate::domain::failure::{Failure, Stale};
use crate::domain::typed::{self, Number, NumberRule};

/// A piece of a form.
#[derive(Clone, Debug)]
pub enum Part {
    Field(Field),
    Heading {
        words: String,
        note: String,
    },
    /// Rows of like fields, such as ingredients: a table of inputs.
    Grid {
        caption: String,
        heads: Vec<String>,
        rows: Vec<Vec<Field>>,
    },
    /// The signing frame: meaning, then user name and password.
    Signature {
        meaning: String,
        fields: Vec<Field>,
    },
}

/// A form as a page shows it.
#[derive(Clone, Debug, Template)]
#[template(path = "part/form.html")]
pub struct Form {
    pub action: String,
    pub button: String,
    /// A second, quiet button: name, value, words.
    pub other_buttons: Vec<(String, String, String)>,
    pub parts: Vec<Part>,
    /// Sent along unseen: form token, submission key, record version.
    pub hidden: Vec<(String, String)>,
    pub takes_files: bool,
    /// A refusal of a rule that belongs to no field.
    pub refusal: Option<String>,
    pub stale: Option<Stale>,
    /// The button is the page's one primary act.
    pub is_primary: bool,
}

impl askama::filters::HtmlSafe for Form {}

/// The hidden fields the program itself adds and checks.
pub const OWN_FIELDS: [&str; 2] = ["form_token", "submission"];

impl Form {
    /// An empty form with a fresh submission key.
    pub fn new(visit: &Visit, action: &str, button: &str) -> Result<Form, Failure> {
        let mut hidden = Vec::new();
        if let Some(signed_in) = &visit.signed_in {
            hidden.push(("form_token".to_string(), signed_in.form_token.clone()));
        }
        hidden.push(("submission".to_string(), crate::acts::secret::token()?));
        Ok(Form {
            action: action.to_string(),
            button: button.to_string(),
            other_buttons: Vec::new(),
            parts: Vec::new(),
            hidden,
            takes_files: false,
            refusal: None,
            stale: None,
            is_primary: true,
        })
    }

    pub fn field(mut self, field: Field) -> Form {
        self.takes_files |= field.entry == Entry::File;
        self.parts.push(Part::Field(field));
        self
    }

    pub fn heading(mut self, words: &str, note: &str) -> Form {
        self.parts.push(Part::Heading { words: words.to_string(), note: note.to_string() });
        self
    }

    pub fn grid(mut self, caption: &str, heads: &[&str], mut rows: Vec<Vec<Field>>) -> Form {
        for field in rows.iter_mut().flatten() {
            field.is_in_grid = true;
        }
        let heads = heads.iter().map(|head| head.to_string()).collect();
        self.parts.push(Part::Grid { caption: caption.to_string(), heads, rows });
        self
    }

    /// The signing frame. `meaning` is what the signer states.
    pub fn signature(mut self, meaning: &str) -> Form {
        let fields = vec![
            Field::new("user_name", "Your user name", Entry::UserName).width(20),
            Field::new("password", "Your password", Entry::Password).width(20),
        ];
        self.parts.push(Part::Signature { meaning: meaning.to_string(), fields });
        self
    }

    pub fn hide(mut self, name: &str, value: impl Into<String>) -> Form {
        self.hidden.push((name.to_string(), value.into()));
        self
    }

    pub fn other_button(mut self, name: &str, value: &str, words: &str) -> Form {
        self.other_buttons.push((name.to_string(), value.to_string(), words.to_string()));
        self
    }

    /// A form that is not the page's main act.
    pub fn quiet(self) -> Form {
        Form { is_primary: false, ..self }
    }

    fn is_signing(&self) -> bool {
        self.parts.iter().any(|part| matches!(part, Part::Signature { .. }))
    }

    pub fn fields(&self) -> impl Iterator<Item = &Field> {
        self.parts.iter().flat_map(|part| match part {
            Part::Field(field) => vec![field],
            Part::Grid { rows, .. } => rows.iter().flatten().collect(),
            Part::Signature { fields, .. } => fields.iter().collect(),
            Part::Heading { .. } => Vec::new(),
        })
    }

    fn fields_mut(&mut self) -> impl Iterator<Item = &mut Field> {
        self.parts.iter_mut().flat_map(|part| match part {
            Part::Field(field) => vec![field],
            Part::Grid { rows, .. } => rows.iter_mut().flatten().collect(),
            Part::Signature { fields, .. } => fields.iter_mut().collect(),
            Part::Heading { .. } => Vec::new(),
        })
    }

    /// Takes over what was typed. A name the form does not have is refused (sec_S53).
    pub fn fill(&mut self, visit: &Visit) -> Result<(), Failure> {
        for field in self.fields_mut().filter(|field| field.entry != Entry::Fixed) {
            field.value = visit.form.get(&field.name).unwrap_or_default().to_string();
        }
        for (name, _) in visit.form.iter() {
            let is_known = OWN_FIELDS.contains(&name)
                || self.hidden.iter().any(|(known, _)| known == name)
                || self.other_buttons.iter().any(|(known, _, _)| known == name)
                || self.fields().any(|field| field.name == name);
            if !is_known {
                return Err(Failure::BadRequest(format!("This form has no field “{name}”.")));
            }
        }
        Ok(())
    }

    /// The errors in reading order: target and sentence, for the summary.
    pub fn errors(&self) -> Vec<(String, String)> {
        self.fields()
            .filter_map(|field| field.error.as_ref().map(|error| (field.target(), error.clone())))
            .collect()
    }

    pub fn has_errors(&self) -> bool {
        self.refusal.is_some() || self.stale.is_some() || self.fields().any(|field| field.error.is_some())
    }

    /// Puts an error at a field, or on top where the form has no such field.
    pub fn refuse(&mut self, field: Option<&str>, sentence: &str) {
        let found = field.and_then(|name| self.fields_mut().find(|field| field.name == name));
        match found {
            Some(field) => field.error = Some(sentence.to_string()),
            None => self.refusal = Some(sentence.to_string()),
        }
    }

    /// Reads the typed values; errors gather at their fields.
    pub fn reading<'a>(&'a mut self, visit: &'a Visit) -> Typed<'a> {
        Typed { form: self, visit }
    }
}

/// The typed values of a form, read one by one; every fault is kept at its field.
pub struct Typed<'a> {
    form: &'a mut Form,
    pub visit: &'a Visit,
}

impl Typed<'_> {
    fn label(&self, name: &str) -> String {
        let field = self.form.fields().find(|field| field.name == name);
        field.map(|field| field.label.clone()).unwrap_or_else(|| name.to_string())
    }

    /// What was typed, trimmed; empty where nothing was.
    pub fn raw(&self, name: &str) -> String {
        self.visit.form.get(name).unwrap_or_default().trim().to_string()
    }

    pub fn fault(&mut self, name: &str, sentence: impl Into<String>) {
        self.form.refuse(Some(name), &sentence.into());
    }

    /// A text that must be there, of at most this many characters.
    pub fn text(&mut self, name: &str, most: usize) -> Option<String> {
        let text = self.raw(name);
        if text.is_empty() {
            self.fault(name, format!("{} is empty. Fill it in.", self.label(name)));
            return None;
        }
        self.limited(name, text, most)
    }

    /// A text that may be missing.
    pub fn maybe_text(&mut self, name: &str, most: usize) -> Option<Option<String>> {
        let text = self.raw(name);
        if text.is_empty() { Some(None) } else { self.limited(name, text, most).map(Some) }
    }

    fn limited(&mut self, name: &str, text: String, most: usize) -> Option<String> {
        let length = text.chars().count();
        if length > most {
            let label = self.label(name);
            self.fault(name, format!("{label} has {length} characters; at most {most} fit. Shorten it."));
            return None;
        }
        Some(text)
    }

    /// One of the field's choices.
    pub fn choice(&mut self, name: &str) -> Option<String> {
        let text = self.raw(name);
        let is_known = self
            .form
            .fields()
            .any(|field| field.name == name && field.choices.iter().any(|choice| choice.value == text));
        if !is_known {
            self.fault(name, format!("{}: choose one of the listed.", self.label(name)));
            return None;
        }
        Some(text)
    }

    pub fn maybe_choice(&mut self, name: &str) -> Option<Option<String>> {
        if self.raw(name).is_empty() { Some(None) } else { self.choice(name).map(Some) }
    }

    /// A choice that is a record's number.
    pub fn record(&mut self, name: &str) -> Option<i64> {
        self.choice(name)?.parse().ok()
    }

    pub fn maybe_record(&mut self, name: &str) -> Option<Option<i64>> {
        if self.raw(name).is_empty() { Some(None) } else { self.record(name).map(Some) }
    }

    pub fn decimal(&mut self, name: &str, rule: &NumberRule) -> Option<Number> {
        let read = typed::number(&self.raw(name), rule);
        self.kept(name, read)
    }

    pub fn maybe_decimal(&mut self, name: &str, rule: &NumberRule) -> Option<Option<Number>> {
        if self.raw(name).is_empty() { Some(None) } else { self.decimal(name, rule).map(Some) }
    }

    /// A whole number between two bounds.
    pub fn count(&mut self, name: &str, least: i64, most: i64) -> Option<i64> {
        let rule = NumberRule::between(&self.label(name), least, most);
        let read = typed::count(&self.raw(name), &rule);
        let number = self.kept(name, read)?;
        i64::try_from(number.value.mantissa()).ok()
    }

    pub fn maybe_count(&mut self, name: &str, least: i64, most: i64) -> Option<Option<i64>> {
        if self.raw(name).is_empty() { Some(None) } else { self.count(name, least, most).map(Some) }
    }

    pub fn date(&mut self, name: &str) -> Option<NaiveDate> {
        let read = typed::date(&self.raw(name), &self.label(name));
        self.kept(name, read)
    }

    pub fn tick(&self, name: &str) -> bool {
        self.raw(name) == "yes"
    }

    /// A reason: one of the listed words or at least ten characters.
    pub fn reason(&mut self, name: &str) -> Option<crate::domain::reason::Reason> {
        let read = crate::domain::reason::Reason::given(&self.raw(name));
        self.kept(name, read)
    }

    fn kept<T>(&mut self, name: &str, read: Result<T, impl std::fmt::Display>) -> Option<T> {
        match read {
            Ok(value) => Some(value),
            Err(fault) => {
                self.fault(name, fault.to_string());
                None
            }
        }
    }
}

/// A page that is one form.
#[derive(Template)]
#[template(path = "form.html")]
pub struct FormPage {
    pub shell: Shell,
    pub lead: String,
    pub note: String,
    pub form: Form,
}

/// Shows a page that is one form.
pub fn show(visit: &Visit, title: &str, lead: &str, form: Form) -> Outcome {
    show_with(200, visit, title, lead, form)
}

fn show_with(status: u16, visit: &Visit, title: &str, lead: &str, form: Form) -> Outcome {
    let shell = Shell::of(visit, title).with_errors(&form);
    page_with(status, &FormPage { shell, lead: lead.to_string(), note: String::new(), form })
}

/// The whole life of a submitted form: fill, read, act, and either 303 or the same form with what was typed.
///
/// `read` returns `None` where a field has a fault (they are at their fields by then): 422. A refused rule
/// comes back at its field or on top: 409. `page` shows the form again with the given status.
pub fn submit<N, T>(
    visit: &Visit,
    mut form: Form,
    read: impl FnOnce(&mut Typed<'_>) -> Option<N>,
    act: impl FnOnce(&Actor, N) -> Result<T, Failure>,
    goto: impl FnOnce(T) -> String,
    page: impl FnOnce(u16, Form) -> Outcome,
) -> Outcome {
    form.fill(visit)?;
    let new = read(&mut form.reading(visit));
    let Some(new) = new.filter(|_| !form.has_errors()) else { return page(422, form) };
    match act(visit.actor()?, new) {
        Ok(done) => see(goto(done)),
        Err(Failure::Refused(refusal)) => {
            form.refuse(refusal.field.as_deref(), &refusal.sentence);
            page(409, form)
        }
        Err(Failure::Stale(stale)) => {
            form.stale = Some(stale);
            page(409, form)
        }
        Err(other) => Err(other),
    }
}

/// [`submit`] for a page that is one form.
pub fn submit_page<N, T>(
    visit: &Visit,
    title: &str,
    lead: &str,
    form: Form,
    read: impl FnOnce(&mut Typed<'_>) -> Option<N>,
    act: impl FnOnce(&Actor, N) -> Result<T, Failure>,
    goto: impl FnOnce(T) -> String,
) -> Result<Reply, Failure> {
    submit(visit, form, read, act, goto, |status, form| show_with(status, visit, title, lead, form))
}
