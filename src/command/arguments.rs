//! The command line.

use clap::{Parser, Subcommand, ValueEnum};
use std::path::PathBuf;

/// Complexing-agent dosing for plating and cleaning baths.
#[derive(Debug, Parser)]
#[command(name = "bathwright", version, args_conflicts_with_subcommands = true)]
pub struct Arguments {
    /// Project file to open in the window; the first demo bath without one.
    pub file: Option<PathBuf>,
    /// What to do without a window.
    #[command(subcommand)]
    pub command: Option<Command>,
}

/// What to do without a window.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// Print the equilibrium of the bath at its set point.
    Solve {
        /// Project file.
        file: PathBuf,
        /// One JSON object instead of tables.
        #[arg(long)]
        json: bool,
    },
    /// Find the smallest dose of an agent that holds every limit over the operating range.
    Dose {
        /// Project file.
        file: PathBuf,
        /// Product id, name or agent; the bath's first agent without it.
        #[arg(long)]
        agent: Option<String>,
        /// Blend all agents that are not locked, at least price or least weight.
        #[arg(long, value_enum, conflicts_with = "agent", num_args = 0..=1, default_missing_value = "cheapest")]
        blend: Option<LeastIn>,
        /// One JSON object instead of tables.
        #[arg(long)]
        json: bool,
    },
    /// Correct the bath from today's analysis: the addition or bail-out that brings it back.
    Correct {
        /// Project file with an analysis.
        file: PathBuf,
        /// Product id, name or agent; the bath's first agent without it.
        #[arg(long)]
        agent: Option<String>,
        /// One JSON object instead of tables.
        #[arg(long)]
        json: bool,
    },
    /// Write the dosing sheet for the dose found.
    Sheet {
        /// Project file.
        file: PathBuf,
        /// Where to write it: .pdf, .csv or .txt.
        #[arg(long)]
        out: PathBuf,
        /// Product id, name or agent; the bath's first agent without it.
        #[arg(long)]
        agent: Option<String>,
        /// Paper of the PDF.
        #[arg(long, value_enum, default_value_t = PaperSize::A4)]
        paper: PaperSize,
    },
    /// Write a map of free metal over pH and dose.
    Map {
        /// Project file.
        file: PathBuf,
        /// Where to write it: .svg or .csv.
        #[arg(long)]
        out: PathBuf,
        /// Metal whose free level is mapped, or "limit" for the share of the nearest limit; the first limited metal
        /// without it.
        #[arg(long)]
        of: Option<String>,
        /// Agent whose dose runs upwards; the bath's first agent without it.
        #[arg(long)]
        agent: Option<String>,
    },
    /// Print what the rinse water does with the agent: stages, treatment, limits, what breaks the complex.
    Rinse {
        /// Project file.
        file: PathBuf,
        /// Product id, name or agent, at its smallest dose that holds; the doses of the project without it.
        #[arg(long)]
        agent: Option<String>,
        /// One JSON object instead of tables.
        #[arg(long)]
        json: bool,
    },
    /// Compare two agents, each at its own smallest dose that holds.
    Compare {
        /// Project file.
        file: PathBuf,
        /// Product id, name or agent.
        #[arg(long)]
        with: String,
        /// Product id, name or agent to compare with it.
        #[arg(long)]
        and: String,
        /// One JSON object instead of a table.
        #[arg(long)]
        json: bool,
    },
    /// Write a distribution diagram.
    Diagram {
        /// Project file.
        file: PathBuf,
        /// Where to write it: .svg or .csv.
        #[arg(long)]
        out: PathBuf,
        /// Metal or agent whose whereabouts are drawn; the first limited metal without it.
        #[arg(long)]
        of: Option<String>,
        /// What runs along the bottom.
        #[arg(long, value_enum, default_value_t = Against::Ph)]
        against: Against,
        /// Agent whose dose runs along the bottom.
        #[arg(long)]
        agent: Option<String>,
        /// Points along the bottom.
        #[arg(long, default_value_t = 400, value_parser = clap::value_parser!(u32).range(2..=20_000))]
        points: u32,
    },
    /// Forecast the bath through its shifts, and plan the additions that hold it.
    Shift {
        /// Project file.
        file: PathBuf,
        /// Shifts to look ahead; as the project says without it.
        #[arg(long, value_parser = clap::value_parser!(u32).range(1..=100))]
        shifts: Option<u32>,
        /// Product id, name or agent; the bath's first agent without it.
        #[arg(long)]
        agent: Option<String>,
        /// One JSON object instead of tables.
        #[arg(long)]
        json: bool,
        /// Where to write the hours as well: .svg or .csv.
        #[arg(long)]
        out: Option<PathBuf>,
    },
}

/// What a blend is to be least in.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum LeastIn {
    /// Price of the products.
    Cheapest,
    /// Weight of the products.
    Lightest,
}

/// What runs along the bottom of a diagram.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum Against {
    /// pH.
    Ph,
    /// Dose of an agent.
    Dose,
}

/// Paper of a sheet.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum PaperSize {
    /// 210 × 297 mm.
    A4,
    /// 8.5 × 11 in.
    Letter,
}
