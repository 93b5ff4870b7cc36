//! A page of facts, tables and forms: what most lists and records are.

use askama::Template;

use super::form::Form;
use super::page::Shell;
use super::part::{Signatures, Trail};
use super::reply::{Outcome, page_with};
use super::table::Table;

/// One section of a page.
#[derive(Clone, Debug)]
pub struct Section {
    pub heading: String,
    pub note: String,
    pub body: Body,
}

/// What a section shows.
#[derive(Clone, Debug)]
pub enum Body {
    Table(Table),
    Form(Form),
    Signatures(Signatures),
    Facts(Vec<(String, String)>),
    Sentences(Vec<String>),
}

/// A page in the making.
#[derive(Clone, Debug, Template)]
#[template(path = "record.html")]
pub struct Record {
    pub shell: Shell,
    pub lead: String,
    pub facts: Vec<(String, String)>,
    /// Path, words, and whether it is the page's primary act.
    pub links: Vec<(String, String, bool)>,
    pub sections: Vec<Section>,
    pub trail: Option<Trail>,
}

impl Record {
    pub fn new(shell: Shell, lead: impl Into<String>) -> Record {
        Record {
            shell,
            lead: lead.into(),
            facts: Vec::new(),
            links: Vec::new(),
            sections: Vec::new(),
            trail: None,
        }
    }

    pub fn fact(mut self, name: &str, value: impl Into<String>) -> Record {
        self.facts.push((name.to_string(), value.into()));
        self
    }

    /// A link as a button, where it may be followed.
    pub fn link_if(mut self, may: bool, path: impl Into<String>, words: &str) -> Record {
        if may {
            let is_primary = !self.links.iter().any(|(_, _, is_primary)| *is_primary);
            self.links.push((path.into(), words.to_string(), is_primary));
        }
        self
    }

    /// A quiet link beside the page's main act.
    pub fn quiet_link_if(mut self, may: bool, path: impl Into<String>, words: &str) -> Record {
        if may {
            self.links.push((path.into(), words.to_string(), false));
        }
        self
    }

    fn section(mut self, heading: &str, note: &str, body: Body) -> Record {
        self.sections.push(Section { heading: heading.to_string(), note: note.to_string(), body });
        self
    }

    pub fn table(self, heading: &str, table: Table) -> Record {
        self.section(heading, "", Body::Table(table))
    }

    pub fn form(self, heading: &str, note: &str, form: Option<Form>) -> Record {
        match form {
            Some(form) => self.section(heading, note, Body::Form(form)),
            None => self,
        }
    }

    pub fn signatures(self, signatures: Signatures) -> Record {
        if signatures.signed.is_empty() {
            return self;
        }
        self.section("Signatures", "", Body::Signatures(signatures))
    }

    pub fn sentences(self, heading: &str, sentences: Vec<String>) -> Record {
        self.section(heading, "", Body::Sentences(sentences))
    }

    pub fn more_facts(self, heading: &str, facts: Vec<(String, String)>) -> Record {
        self.section(heading, "", Body::Facts(facts))
    }

    pub fn trail(self, trail: Trail) -> Record {
        Record { trail: Some(trail), ..self }
    }

    pub fn show(self) -> Outcome {
        self.show_with(200)
    }

    pub fn show_with(self, status: u16) -> Outcome {
        page_with(status, &self)
    }
}
