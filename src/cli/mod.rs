//! The commands of the program, one file each.

pub mod account;
pub mod backup;
pub mod demo;
pub mod evaluate;
pub mod folder;
pub mod identity;
pub mod import;
pub mod listen;
pub mod lot_file;
pub mod restore;
pub mod serve;
pub mod timed;
pub mod verify;

use std::process::ExitCode;

use clap::{Parser, Subcommand};

use crate::domain::failure::Failure;

/// Batch and stability records of suspension products, from a formulation to a signed pull.
#[derive(Parser)]
#[command(name = "supernate", version, about, arg_required_else_help = true)]
struct Arguments {
    #[command(subcommand)]
    command: Command,
}

#[derive(Subcommand)]
enum Command {
    Serve(serve::Arguments),
    Demo(demo::Arguments),
    Import(import::Arguments),
    LotFile(lot_file::Arguments),
    Verify(verify::Arguments),
    Backup(backup::Arguments),
    Restore(restore::Arguments),
    Account(account::Arguments),
    /// Shelf life and trend of any tidy table of results, without a database
    Evaluate(evaluate::Args),
}

/// Runs the command of the arguments; 0 where it did what was asked, 1 where not, 2 where it was not understood.
pub fn run() -> ExitCode {
    let filter = tracing_subscriber::EnvFilter::try_from_default_env()
        .unwrap_or_else(|_| tracing_subscriber::EnvFilter::new("info,refinery_core=warn"));
    tracing_subscriber::fmt().json().with_env_filter(filter).with_writer(std::io::stderr).init();
    let outcome = match Arguments::parse().command {
        Command::Serve(arguments) => serve::run(&arguments),
        Command::Demo(arguments) => demo::run(&arguments),
        Command::Import(arguments) => import::run(&arguments),
        Command::LotFile(arguments) => lot_file::run(&arguments),
        Command::Verify(arguments) => verify::run(&arguments),
        Command::Backup(arguments) => backup::run(&arguments),
        Command::Restore(arguments) => restore::run(&arguments),
        Command::Account(arguments) => account::run(&arguments),
        Command::Evaluate(arguments) => return evaluated(&arguments),
    };
    match outcome {
        Ok(()) => ExitCode::SUCCESS,
        Err(failure) => {
            tell(&failure);
            ExitCode::FAILURE
        }
    }
}

/// A table that cannot be read is told with its lines, exit code 2; nothing is half printed.
#[allow(clippy::print_stdout, clippy::print_stderr)]
fn evaluated(arguments: &evaluate::Args) -> ExitCode {
    match evaluate::run(arguments) {
        Ok(text) => {
            print!("{text}");
            ExitCode::SUCCESS
        }
        Err(refusal) => {
            eprint!("{refusal}");
            ExitCode::from(2)
        }
    }
}

#[allow(clippy::print_stderr)]
fn tell(failure: &Failure) {
    eprintln!("supernate: {failure}");
}
