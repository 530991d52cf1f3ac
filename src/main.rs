//! The program `biasloom`: everything is in the library, see [`biasloom::cli`].

fn main() -> std::process::ExitCode {
    biasloom::cli::main()
}
