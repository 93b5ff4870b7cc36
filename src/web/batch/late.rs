//! Entering something late: an earlier time with its reason, asked once and carried by every form of the page.

use super::super::form::Form;
use super::super::visit::Visit;
use crate::domain::batch::late::Late;
use crate::domain::moment::Moment;
use crate::domain::reason::Reason;
use crate::domain::typed;

/// What was typed of the earlier time.
#[derive(Clone, Debug, Default)]
pub struct LateWords {
    pub on: String,
    pub at: String,
    pub why: String,
}

pub const QUERY: [&str; 3] = ["late_on", "late_at", "late_why"];

impl LateWords {
    /// From the form that comes back, else from the address.
    pub fn of(visit: &Visit) -> LateWords {
        let said = |name: &str| {
            let found = visit.form.get(name).or(visit.query.get(name));
            found.unwrap_or_default().trim().to_string()
        };
        LateWords { on: said("late_on"), at: said("late_at"), why: said("late_why") }
    }

    pub fn is_stated(&self) -> bool {
        !(self.on.is_empty() && self.at.is_empty())
    }

    /// Carried along unseen by a form.
    pub fn hide_in(&self, form: Form) -> Form {
        form.hide("late_on", self.on.as_str())
            .hide("late_at", self.at.as_str())
            .hide("late_why", self.why.as_str())
    }

    /// What was typed, as a time and a reason; one sentence where it cannot be read.
    pub fn read(&self, now: Moment) -> Result<Late, String> {
        if !self.is_stated() {
            return Ok(Late::default());
        }
        let date = typed::date(&self.on, "Done on").map_err(|fault| fault.to_string())?;
        let clock = || {
            let (hour, minute) = self.at.split_once(':')?;
            Moment::of_site(date, hour.trim().parse().ok()?, minute.trim().parse().ok()?, now.zone)
        };
        let Some(happened) = clock() else {
            return Err(format!("Done at: “{}” is not a time. Type it such as 14:05.", self.at));
        };
        let reason = Reason::given(&self.why).unwrap_or_default();
        Ok(Late { happened_at: Some(happened), reason })
    }

    /// The sentence that stands over the forms while an earlier time is carried.
    pub fn told(&self) -> String {
        if self.is_stated() {
            format!(
                "Everything you record on this page now is marked as late: done on {} at {}, because {}.",
                self.on, self.at, self.why
            )
        } else {
            String::new()
        }
    }
}
