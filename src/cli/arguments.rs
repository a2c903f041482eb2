//! The command line.

use clap::{Parser, Subcommand, ValueEnum};
use std::path::PathBuf;

/// Markov chain Monte Carlo studies from a text file, with the error of each figure and the grounds it
/// stands on.
#[derive(Debug, Parser)]
#[command(name = "odograph", version, arg_required_else_help = true)]
pub struct Arguments {
    #[command(subcommand)]
    pub command: Command,
}

#[derive(Debug, Subcommand)]
pub enum Command {
    /// Read a study and say what would be run, why, on what grounds and at what cost; no draws
    Check {
        /// The study, a TOML file
        study: PathBuf,
    },
    /// Run a study; a run that was interrupted goes on, one that is done is reported again
    Run {
        /// The study, a TOML file
        study: PathBuf,
        /// Folder for the results
        #[arg(long, value_name = "DIR", default_value = "results")]
        into: PathBuf,
        /// Threads to work on; no digit depends on it [default: all that the machine offers]
        #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=4096))]
        threads: Option<u16>,
        /// Print the summary as JSON on stdout
        #[arg(long)]
        json: bool,
    },
    /// Close an interrupted run as it stands, under a plan that says so; the run itself can still go on
    Seal {
        /// The study, a TOML file
        study: PathBuf,
        /// Folder of the results
        #[arg(long, value_name = "DIR", default_value = "results")]
        into: PathBuf,
    },
    /// Hold a record against its own study: files, plan, draws, figures, pages, and the draws drawn again
    Verify {
        /// The folder of a sealed record
        record: PathBuf,
        /// Draw only this part of the blocks again, chosen by lot: 5% [default: all]
        #[arg(long, value_name = "PART", value_parser = super::verify::part)]
        blocks: Option<f64>,
        /// Also run the plan again under so many roots drawn now, and compare every estimate
        #[arg(long, value_name = "RUNS", num_args = 0..=1, default_missing_value = "1",
              value_parser = clap::value_parser!(u32).range(1..=1000))]
        fresh: Option<u32>,
        /// Words that decide the lot and the fresh roots [default: the operating system's randomness]
        #[arg(long, value_name = "WORDS")]
        seed: Option<String>,
        /// Threads to work on [default: all that the machine offers]
        #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=4096))]
        threads: Option<u16>,
        /// Print the account as JSON on stdout
        #[arg(long)]
        json: bool,
    },
    /// List the records under a folder: how far each is, its goal, its first figures
    List {
        /// The folder that holds the results
        #[arg(default_value = "results")]
        folder: PathBuf,
        /// Only those with this in path, title, question or digests
        #[arg(long, value_name = "TEXT")]
        with: Option<String>,
        /// Only those that are so
        #[arg(long, value_name = "STATE")]
        only: Option<super::list::Only>,
        /// Print the list as JSON on stdout
        #[arg(long)]
        json: bool,
    },
    /// List the laws, functions and methods that a study may use
    Catalogue {
        /// Only one of the lists
        list: Option<List>,
    },
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub enum List {
    Laws,
    Functions,
    Methods,
}
