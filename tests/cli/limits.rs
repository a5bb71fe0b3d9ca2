//! How large a drawing may be, and the option that raises it.

use crate::bad::Shop;

#[test]
fn what_is_too_large_is_told_and_the_limits_can_be_raised() {
    let shop = Shop::new();
    shop.put("three.csv", "0,0\n1,0\n\n0,2\n1,2\n\n0,4\n1,4\n");
    let ring = |k: u32| f64::from(k).sin_cos();
    let many: Vec<String> =
        (0..60).map(|k| format!("{:.1},{:.1}", 9.0 * ring(k).0, 9.0 * ring(k).1)).collect();
    shop.put("many.csv", many.join("\n"));
    shop.put("long.csv", format!("0,0{}\n5,5\n", " ".repeat(3000)));
    let measure = |drawing: &str, more: &[&str]| {
        shop.run(&[&["measure", drawing, "--drawing-unit", "mm"], more].concat())
    };
    for (drawing, said) in [
        ("three.csv", "the drawing has 3 contours, and 2 is the limit"),
        ("many.csv", "the drawing has 60 vertices, and 50 is the limit"),
        ("long.csv", "the file has more than 2684 bytes"),
    ] {
        let large = measure(drawing, &["--size-limit", "0.00001"]);
        assert_eq!(large.status, 3, "{}", large.err);
        assert!(large.err.contains(drawing) && large.err.contains(said), "{}", large.err);
        assert!(large.err.contains("--size-limit"), "{}", large.err);
        for more in [&["--size-limit", "0.0001"][..], &[]] {
            let read = measure(drawing, more);
            assert_eq!(read.status, 0, "{drawing}: {}", read.err);
        }
    }
    shop.put("p.nc", format!("G21{}\n", " ".repeat(9)).repeat(300));
    let check =
        ["check", "p.nc", "--against", "square.csv", "--drawing-unit", "mm", "--size-limit", "0.00001"];
    let program = shop.run(&check);
    assert!(program.status == 3 && program.err.contains("p.nc: the file has more"), "{}", program.err);
    assert_eq!(measure("three.csv", &["--size-limit", "0"]).status, 2);
}
