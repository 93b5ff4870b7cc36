//! One form field: its definition, the text that was typed, and its error, rendered by one template.

use askama::Template;

/// How a field is entered.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Entry {
    Text,
    /// A decimal number: right-aligned, decimal keypad.
    Decimal,
    /// A whole number: digit keypad.
    Count,
    Date,
    /// Several lines of free text.
    Long,
    Password,
    NewPassword,
    UserName,
    Select,
    Radios,
    /// One yes-or-no box.
    Tick,
    File,
    /// Only shown, such as the name of a grid's row.
    Fixed,
}

/// One choice of a select or a group of radios.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Choice {
    pub value: String,
    pub label: String,
    /// The sentence that anchors a grade.
    pub anchor: String,
    /// The file that shows the grade, where there is a reference photograph.
    pub photo: Option<i64>,
}

/// A bound field.
#[derive(Clone, Debug, Template)]
#[template(path = "part/field.html")]
pub struct Field {
    pub name: String,
    /// With its unit: "Sediment volume, mL".
    pub label: String,
    pub hint: String,
    pub entry: Entry,
    pub choices: Vec<Choice>,
    pub value: String,
    pub error: Option<String>,
    /// Width in characters (4, 8, 12, 20), or 0 for the full measure.
    pub width: u8,
    /// Inside a grid the label is for screen readers only.
    pub is_in_grid: bool,
}

impl askama::filters::HtmlSafe for Field {}

impl Field {
    pub fn new(name: &str, label: &str, entry: Entry) -> Field {
        Field {
            name: name.to_string(),
            label: label.to_string(),
            hint: String::new(),
            entry,
            choices: Vec::new(),
            value: String::new(),
            error: None,
            width: 0,
            is_in_grid: false,
        }
    }

    pub fn hint(self, hint: &str) -> Field {
        Field { hint: hint.to_string(), ..self }
    }

    pub fn value(self, value: impl Into<String>) -> Field {
        Field { value: value.into(), ..self }
    }

    pub fn width(self, width: u8) -> Field {
        Field { width, ..self }
    }

    pub fn choices<V: Into<String>, L: Into<String>>(
        self,
        choices: impl IntoIterator<Item = (V, L)>,
    ) -> Field {
        let choices = choices
            .into_iter()
            .map(|(value, label)| Choice {
                value: value.into(),
                label: label.into(),
                anchor: String::new(),
                photo: None,
            })
            .collect();
        Field { choices, ..self }
    }

    /// Choices with the sentence that anchors each.
    pub fn grades(self, choices: Vec<Choice>) -> Field {
        Field { choices, ..self }
    }

    /// The element an error link leads to: the field, or the first of its choices.
    pub fn target(&self) -> String {
        match self.entry {
            Entry::Radios => format!("{}-1", self.name),
            _ => self.name.clone(),
        }
    }

    fn is_chosen(&self, value: &str) -> bool {
        self.value == value
    }

    fn input_type(&self) -> &'static str {
        if matches!(self.entry, Entry::Password | Entry::NewPassword) { "password" } else { "text" }
    }

    fn input_mode(&self) -> &'static str {
        match self.entry {
            Entry::Decimal => "decimal",
            Entry::Count => "numeric",
            _ => "text",
        }
    }

    fn autocomplete(&self) -> &'static str {
        match self.entry {
            Entry::UserName => "username",
            Entry::Password => "current-password",
            Entry::NewPassword => "new-password",
            _ => "off",
        }
    }

    fn class(&self) -> String {
        let mut class = String::new();
        if matches!(self.entry, Entry::Decimal | Entry::Count) {
            class.push_str("number ");
        }
        if self.width > 0 {
            class.push_str(&format!("chars-{}", self.width));
        }
        class
    }

    fn described_by(&self) -> String {
        let mut ids = Vec::new();
        if !self.hint.is_empty() {
            ids.push(format!("{}-hint", self.name));
        }
        if self.error.is_some() {
            ids.push(format!("{}-error", self.name));
        }
        ids.join(" ")
    }
}
