//! Every example that `--help` shows is run as it stands.

use std::fs;

use crate::bad::Shop;
use crate::formats::Contours;

const COMMANDS: [&str; 9] =
    ["post", "measure", "preview", "check", "condense", "compare", "machines", "completions", "manual"];

#[test]
fn the_examples_of_every_command_run() {
    let shop = Shop::new();
    let square = Contours::from_csv("0,0\n60,0\n60,40\n0,40\n0,0\n");
    shop.put("sign.dxf", square.dxf());
    shop.put("blade.svg", square.svg());
    shop.put("template.csv", square.csv());
    fs::create_dir(shop.path("programs")).expect("a folder");
    for command in COMMANDS {
        let help = shop.run(&[command, "--help"]);
        let examples: Vec<&str> =
            help.out.lines().filter_map(|line| line.strip_prefix("  ribband ")).collect();
        assert!(!examples.is_empty(), "{command} shows no example: {}", help.out);
        for example in examples {
            assert!(example.starts_with(command), "{example}");
            // What comes after > is the shell's.
            let words: Vec<&str> = example.split_whitespace().take_while(|word| *word != ">").collect();
            let ended = shop.run(&words);
            assert_eq!(ended.status, 0, "{example}: {}{}", ended.out, ended.err);
        }
    }
    for written in
        ["sign.nc", "programs/blade.nc", "sign.html", "blade-picture.svg", "blade-cost.svg", "short.nc"]
    {
        assert!(shop.path(written).exists(), "{written} is written: {:?}", shop.names());
    }
}
