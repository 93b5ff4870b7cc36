//! `supernate evaluate FILE.csv`: shelf life and trend of any tidy table, without a database.

mod json;
mod plot;
mod text;

use std::fmt;
use std::path::PathBuf;

use crate::domain::evaluation::{self, Choices, Complaint, Replicates};

/// Arguments of `evaluate`.
#[derive(Clone, Debug, clap::Args)]
pub struct Args {
    /// A CSV table: lot, test, value and age_months or age_days, or the header of the import files.
    pub file: PathBuf,
    /// Print JSON instead of tables.
    #[arg(long)]
    pub json: bool,
    /// Several results of one lot at one age: their mean, or each as an independent result.
    #[arg(long, value_enum, default_value_t = ReplicateChoice::Mean)]
    pub replicates: ReplicateChoice,
    /// Months to expiry: adds the early warning to each lot.
    #[arg(long)]
    pub expiry_months: Option<f64>,
}

/// The choice for replicates.
#[derive(Clone, Copy, Debug, PartialEq, Eq, clap::ValueEnum)]
pub enum ReplicateChoice {
    /// Averaged.
    Mean,
    /// Each by itself.
    Independent,
}

/// Why nothing was evaluated: sentences for a person, exit code 2.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Refusal {
    file: String,
    complaints: Vec<Complaint>,
}

/// At most so many different complaints are printed.
const SHOWN: usize = 20;

impl fmt::Display for Refusal {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        // One sentence for many lines is printed once, at its first line.
        let mut told: Vec<(&Complaint, usize)> = Vec::new();
        for complaint in &self.complaints {
            match told.iter_mut().find(|(first, _)| first.sentence == complaint.sentence) {
                Some((_, more)) => *more += 1,
                None => told.push((complaint, 0)),
            }
        }
        for (complaint, more) in told.iter().take(SHOWN) {
            match more {
                0 => writeln!(f, "{}: {complaint}", self.file)?,
                1 => writeln!(f, "{}: {complaint} (and 1 more line)", self.file)?,
                _ => writeln!(f, "{}: {complaint} (and {more} more lines)", self.file)?,
            }
        }
        if told.len() > SHOWN {
            writeln!(f, "{}: and {} more things to mend", self.file, told.len() - SHOWN)?;
        }
        Ok(())
    }
}

/// Evaluates the file; the whole output, or nothing but the refusal.
pub fn run(args: &Args) -> Result<String, Refusal> {
    let file = args.file.display().to_string();
    let refuse = |complaints| Refusal { file: file.clone(), complaints };
    let expiry = args.expiry_months;
    if expiry.is_some_and(|months| !(months.is_finite() && months > 0.0)) {
        return Err(refuse(vec![Complaint::whole("--expiry-months must be a number above 0")]));
    }
    let bytes = std::fs::read(&args.file)
        .map_err(|error| refuse(vec![Complaint::whole(format!("the file cannot be read: {error}"))]))?;
    let choices = Choices {
        replicates: match args.replicates {
            ReplicateChoice::Mean => Replicates::Mean,
            ReplicateChoice::Independent => Replicates::Independent,
        },
        expiry_months: expiry,
        ..Choices::default()
    };
    let assessments = evaluation::evaluate(&bytes, &choices).map_err(refuse)?;
    Ok(if args.json { json::document(&assessments) } else { text::document(&assessments) })
}
