//! The program: arguments in, exit status out.

use std::io::Write;
use std::process::ExitCode;

use lowside::{Format, Look, Options, SinkError, card_listing, into_sink, manual, part_listing, review, write_reviews};

mod cli;
mod exit;

use cli::{Cli, Command, Output, completions};
use exit::{Rule, Status};

fn main() -> ExitCode {
    let cli = match Cli::read() {
        Ok(cli) => cli,
        Err((text, asked_for)) if asked_for => {
            return status(into_sink(None, |out| out.write_all(text.as_bytes())), Status::Passes);
        }
        Err((text, _)) => {
            complain(&text);
            return Status::Unusable.into();
        }
    };
    match &cli.command {
        Command::Review(arguments) => {
            let rule = Rule {
                stop_at: arguments.stop_at(),
                unproven_stops: arguments.unproven_stops,
                strict: arguments.strict,
            };
            let options = Options { notes: arguments.notes.clone(), allow_include: arguments.allow_include.clone() };
            let look = cli.look(&arguments.output);
            let mut worst = Status::default();
            let written = into_sink(arguments.output.to.as_deref(), |out| {
                let reviews = arguments.netlists.iter().flat_map(|netlist| review(netlist, &options));
                let mut seen = reviews.inspect(|review| worst = worst.max(rule.status(review)));
                let written = write_reviews(out, &mut seen, arguments.output.format(), look);
                // A reader that went away early must not hide what the other netlists come to.
                seen.for_each(drop);
                written
            });
            status(written, worst)
        }
        Command::Cards(arguments) => {
            let listing = card_listing(arguments.wanted.as_deref(), arguments.facts);
            listed(&cli, &arguments.output, listing, |cards, out, format, look| cards.write(out, format, look))
        }
        Command::Parts(arguments) => {
            let listing = part_listing(arguments.wanted.as_deref());
            listed(&cli, &arguments.output, listing, |parts, out, format, look| parts.write(out, format, look))
        }
        Command::Manual => status(into_sink(None, |out| out.write_all(manual().as_bytes())), Status::Passes),
        Command::Completions { shell } => status(into_sink(None, |out| completions(*shell, out)), Status::Passes),
    }
}

/// Writes what was asked for of the rules, or says why that cannot be asked for.
fn listed<L>(
    cli: &Cli,
    output: &Output,
    listing: Result<L, String>,
    write: impl Fn(&L, &mut dyn Write, Format, Look) -> std::io::Result<()>,
) -> ExitCode {
    match listing {
        Ok(listing) => {
            let look = cli.look(output);
            status(into_sink(output.to.as_deref(), |out| write(&listing, out, output.format(), look)), Status::Passes)
        }
        Err(text) => {
            complain(&format!("lowside: {text}\n"));
            Status::Unusable.into()
        }
    }
}

/// The exit status of a run that came to `status`, unless its result could not be delivered.
fn status(written: Result<(), SinkError>, status: Status) -> ExitCode {
    match written {
        Ok(()) => status.into(),
        Err(error) => {
            complain(&format!("lowside: {error}\n"));
            Status::Unusable.into()
        }
    }
}

/// Says what is wrong with the command. Where standard error is gone too, the exit status says it.
fn complain(text: &str) {
    let _ = std::io::stderr().write_all(text.as_bytes());
}
