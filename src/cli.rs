//! The command line as the user types it. The only file that knows clap.

use std::io::{self, IsTerminal as _, Write};
use std::path::PathBuf;

use clap::{CommandFactory as _, Parser, Subcommand, ValueEnum};
use lowside::{Class, Format, Look};

/// Reads a SPICE-style netlist and reviews every open-collector sink array on it.
#[derive(Parser, Debug)]
#[command(name = "lowside", version, max_term_width = 100, arg_required_else_help = true)]
#[command(after_help = "Exit status: 0 nothing stops, 1 something stops, 2 the input could not be used.")]
pub(crate) struct Cli {
    #[command(subcommand)]
    pub(crate) command: Command,
    /// Colour the class words; auto colours a terminal where NO_COLOR is not set
    #[arg(long, global = true, value_name = "WHEN", default_value = "auto", hide_default_value = true)]
    color: Color,
    /// Print only what is broken, and hazards that are not ruled out
    #[arg(long, global = true)]
    quiet: bool,
}

/// What to do.
#[derive(Subcommand, Debug)]
pub(crate) enum Command {
    /// Judge each netlist
    Review(Review),
    /// List rule cards, or show one whole
    Cards(Cards),
    /// List part profiles, or show one whole
    Parts(Parts),
    /// Print the manual
    Manual,
    /// Print a completion script for a shell
    Completions {
        /// The shell
        shell: clap_complete::Shell,
    },
}

/// `lowside review`
#[derive(clap::Args, Debug)]
pub(crate) struct Review {
    /// Netlists; `-` is standard input
    #[arg(required = true, value_name = "NETLIST")]
    pub(crate) netlists: Vec<PathBuf>,
    /// The notes file [default: BOARD.notes.toml beside BOARD.cir, if there]
    #[arg(long, value_name = "FILE")]
    pub(crate) notes: Option<PathBuf>,
    #[command(flatten)]
    pub(crate) output: Output,
    /// The mildest class that stops
    #[arg(long, value_name = "CLASS", default_value = "malfunction")]
    stop_at: StopAt,
    /// What is unproven at or above the stop class stops too
    #[arg(long)]
    pub(crate) unproven_stops: bool,
    /// A netlist that was read only in part cannot be used
    #[arg(long)]
    pub(crate) strict: bool,
    /// A folder that netlists may include files from; may be repeated
    #[arg(long, value_name = "FOLDER")]
    pub(crate) allow_include: Vec<PathBuf>,
}

/// `lowside cards`
#[derive(clap::Args, Debug)]
pub(crate) struct Cards {
    /// A card's name
    #[arg(value_name = "CARD", conflicts_with = "facts")]
    pub(crate) wanted: Option<String>,
    /// List every fact that a card may name, with its unit and meaning
    #[arg(long)]
    pub(crate) facts: bool,
    #[command(flatten)]
    pub(crate) output: Output,
}

/// `lowside parts`
#[derive(clap::Args, Debug)]
pub(crate) struct Parts {
    /// A type designator, or a profile's name
    #[arg(value_name = "TYPE")]
    pub(crate) wanted: Option<String>,
    #[command(flatten)]
    pub(crate) output: Output,
}

/// In what form a result is written, and where.
#[derive(clap::Args, Debug)]
pub(crate) struct Output {
    /// For a person, or for a program
    #[arg(long = "as", value_name = "FORMAT", default_value = "text")]
    form: Form,
    /// Write to this file, whole or not at all
    #[arg(long, value_name = "FILE")]
    pub(crate) to: Option<PathBuf>,
}

#[derive(ValueEnum, Clone, Copy, Debug)]
enum Color {
    Auto,
    Always,
    Never,
}

#[derive(ValueEnum, Clone, Copy, Debug)]
enum Form {
    Text,
    Json,
}

#[derive(ValueEnum, Clone, Copy, Debug)]
enum StopAt {
    Hazard,
    Damage,
    Malfunction,
    Margin,
    Practice,
}

/// Widths that a terminal may ask for, in columns.
const WIDTHS: std::ops::RangeInclusive<usize> = 40..=200;

impl Cli {
    /// Reads the arguments. Where they cannot be used, or ask for help, the text and the exit status.
    pub(crate) fn read() -> Result<Self, (String, bool)> {
        let cli = Self::try_parse().map_err(|error| (error.render().to_string(), !error.use_stderr()))?;
        if let Command::Review(review) = &cli.command
            && review.notes.is_some()
            && review.netlists.len() > 1
        {
            let text = "lowside: --notes speaks of one board, and several netlists are given: review them one by one\n";
            return Err((text.to_owned(), false));
        }
        Ok(cli)
    }

    /// How text looks that goes to `output`.
    pub(crate) fn look(&self, output: &Output) -> Look {
        let terminal = output.to.is_none() && io::stdout().is_terminal();
        let color = match self.color {
            Color::Always => true,
            Color::Never => false,
            Color::Auto => terminal && std::env::var_os("NO_COLOR").is_none_or(|value| value.is_empty()),
        };
        // Only a terminal has a width of its own: what is kept or compared is the same everywhere.
        let columns = std::env::var("COLUMNS").ok().filter(|_| terminal).and_then(|columns| columns.parse().ok());
        let width = columns.filter(|columns| WIDTHS.contains(columns)).unwrap_or(Look::default().width);
        Look { width, color, quiet: self.quiet }
    }
}

impl Output {
    /// The form of the result.
    pub(crate) fn format(&self) -> Format {
        match self.form {
            Form::Text => Format::Text,
            Form::Json => Format::Json,
        }
    }
}

impl Review {
    /// The mildest class that stops.
    pub(crate) fn stop_at(&self) -> Class {
        match self.stop_at {
            StopAt::Hazard => Class::Hazard,
            StopAt::Damage => Class::Damage,
            StopAt::Malfunction => Class::Malfunction,
            StopAt::Margin => Class::Margin,
            StopAt::Practice => Class::Practice,
        }
    }
}

/// Writes the completion script for `shell`.
pub(crate) fn completions(shell: clap_complete::Shell, out: &mut dyn Write) -> io::Result<()> {
    let mut script = Vec::new();
    clap_complete::generate(shell, &mut Cli::command(), "lowside", &mut script);
    out.write_all(&script)
}
