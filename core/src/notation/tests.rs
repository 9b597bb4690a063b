//! Tests of reading and showing, named by behaviour.

use super::*;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;
use proptest::prelude::*;

/// The tree in a fully bracketed form that ignores places and typed brackets.
fn outline(expression: &Expression) -> String {
    let all = |parts: &[Expression]| parts.iter().map(outline).collect::<Vec<_>>().join(" * ");
    match &expression.node {
        Node::Number(number) => number.value.to_string(),
        Node::Name(name) => name.clone(),
        Node::Laplace => "s".to_string(),
        Node::Advance => "z".to_string(),
        Node::Negation(inner) => format!("-({})", outline(inner)),
        Node::Product(factors) => format!("({})", all(factors)),
        Node::Quotient(above, below) => format!("({} / {})", outline(above), outline(below)),
        Node::Power(base, exponent) => format!("{}^{exponent}", outline(base)),
        Node::Exponential(exponent) => format!("e^({})", outline(exponent)),
        Node::Sum(terms) => {
            let sign = |term: &Term| if term.sign == Sign::Plus { "+" } else { "-" };
            format!("({})", terms.iter().map(|t| format!("{}{}", sign(t), outline(&t.expression))).collect::<String>())
        }
    }
}

fn outline_of(text: &str) -> String {
    outline(&read(text).unwrap_or_else(|error| panic!("{text:?}: {error}")))
}

/// The message and the marked part of the text.
fn fault(text: &str) -> (String, String) {
    let error = read(text).expect_err(text);
    let Span { start, end } = error.span();
    (error.to_string(), text.chars().skip(start).take(end - start).collect())
}

#[test]
fn products_need_no_sign() {
    assert_eq!(outline_of("K (0.12 s + 1)"), "(K * (+(3/25 * s)+1))");
    assert_eq!(outline_of("2s"), "(2 * s)");
    assert_eq!(outline_of("s(s+1)"), "(s * (+s+1))");
    assert_eq!(outline_of("K(s+1)"), "(K * (+s+1))");
    assert_eq!(outline_of("2 Kp s"), "(2 * Kp * s)");
    assert_eq!(outline_of("(s-3)(s+9)(tau s+1)"), "((+s-3) * (+s+9) * (+(tau * s)+1))");
    assert_eq!(outline_of("ts"), "ts");
}

#[test]
fn quotients_go_from_left_to_right() {
    assert_eq!(outline_of("a/b*c"), "((a / b) * c)");
    assert_eq!(outline_of("a/b/c"), "((a / b) / c)");
    assert_eq!(outline_of("a b/c"), "((a * b) / c)");
    assert_eq!(outline_of("a/b*c d"), "((a / b) * c * d)");
    assert_eq!(outline_of("K (0.12 s + 1) / (0.012 s + 1)"), "((K * (+(3/25 * s)+1)) / (+(3/250 * s)+1))");
    assert_eq!(outline_of("1/(2 s) + 1/s^2"), "(+(1 / (2 * s))+(1 / s^2))");
}

#[test]
fn signs_bind_weaker_than_products() {
    assert_eq!(outline_of("-s^2"), "-(s^2)");
    assert_eq!(outline_of("-a b + c"), "(-(a * b)+c)");
    assert_eq!(outline_of("2*-3"), "(2 * -(3))");
    assert_eq!(outline_of("a - -b"), "(+a--(b))");
    assert_eq!(outline_of("+a"), "a");
}

#[test]
fn numbers_are_exact_decimals() {
    assert_eq!(outline_of("0.05"), "1/20");
    assert_eq!(outline_of(".5"), "1/2");
    assert_eq!(outline_of("5."), "5");
    assert_eq!(outline_of("1.2e-3"), "3/2500");
    assert_eq!(outline_of("1.2E+3"), "1200");
    assert_eq!(outline_of("1e3s"), "(1000 * s)");
    assert_eq!(outline_of("2e^(-0.2 s)"), "(2 * e^(-((1/5 * s))))");
    assert_eq!(outline_of("2exp(-s)"), "(2 * e^(-(s)))");
    assert_eq!(outline_of("2eta"), "(2 * eta)");
    assert_eq!(outline_of("1.2×10⁻³"), "(6/5 * 10^-3)");
}

#[test]
fn pasted_typography_is_read() {
    let plain = outline_of("2 tau s^2 (s - 1)/(omega_n s^10)");
    assert_eq!(outline_of("2·τ\u{A0}s²\u{2009}[s − 1]∕(ω_n×s¹⁰)"), plain);
    assert_eq!(outline_of("2⋅𝜏∗𝑠²(𝑠–1)⁄(ω_{n} s^{10})"), plain);
    assert_eq!(outline_of("2 τ s^(+2) {s − 1}/(ωₙ s^(10))"), plain);
}

#[test]
fn a_greek_letter_and_its_name_are_the_same_symbol() {
    assert_eq!(names(&read("τ + tau + ω_n + omega_n + µ + Ω").unwrap()), ["tau", "omega_n", "mu", "Omega"]);
    assert_eq!(symbol(" τ1 ").unwrap(), "tau1");
    assert_eq!(symbol("T_{i}").unwrap(), symbol("Tᵢ").unwrap());
    assert_eq!(symbol("K_τ").unwrap(), "K_tau");
}

#[test]
fn names_come_in_order_of_appearance_without_s() {
    assert_eq!(names(&read("Kp (1 + 1/(T_i s) + T_d s) Kp").unwrap()), ["Kp", "T_i", "T_d"]);
}

#[test]
fn spans_count_characters() {
    let block = read("τ·(s − 3)").unwrap();
    assert_eq!(block.span, Span::new(0, 9));
    assert_eq!(block.parts().last().unwrap().span, Span::new(2, 9));
    assert_eq!(read("τω² ; s").unwrap_err().span(), Span::new(0, 2));
    assert_eq!(read("τ² ; s").unwrap_err().span(), Span::new(3, 4));
}

#[test]
fn every_fault_has_its_message_and_place() {
    let faults = [
        ("", "type a transfer function, such as 2/(s + 1)", ""),
        ("  ", "type a transfer function, such as 2/(s + 1)", "  "),
        ("s # 2", "# is not part of the notation: remove it", "#"),
        ("G = 1/s", "= is not part of the notation: type only what stands right of the equals sign", "="),
        ("1; 2", "; is not part of the notation: type one expression, without ;", ";"),
        ("T' s", "' is not part of the notation: type a subscript instead, such as T_b", "'"),
        ("2:s", ": is not part of the notation: type / for a quotient", ":"),
        ("ä s", "ä is not part of the notation: type names with the letters a to z, A to Z or Greek ones", "ä"),
        ("0,05 s + 1", "use a decimal point: 0.05", "0,05"),
        ("1,000.5", "use a decimal point: 1000.5", "1,000.5"),
        ("1,000,000 s", "use a decimal point: 1000000", "1,000,000"),
        ("s**2", "type ^ for a power, such as s^2", "**"),
        ("1 000 s", "two numbers side by side: type 1*000 for the product, or one number", "1 000"),
        ("1e61", "1e61 is out of range: type an exponent from -60 to 60", "1e61"),
        (
            "2 + 1.5e-99999999999 s",
            "1.5e-99999999999 is out of range: type an exponent from -60 to 60",
            "1.5e-99999999999",
        ),
        ("e", "e is the base of the exponential: type e^(-0.2 s), or use another name", "e"),
        ("2 e s", "e is the base of the exponential: type e^(-0.2 s), or use another name", "e"),
        ("exp s", "type the exponent in brackets: exp(-0.2 s)", "exp"),
        ("e^-s", "put the exponent in brackets: e^(-0.2 s)", "e^-"),
        ("e^", "put the exponent in brackets: e^(-0.2 s)", "e"),
        ("τs + 1", "a product or a name: type τ s for the product, τ_s for the name", "τs"),
        ("Kτ", "a product or a name: type K τ for the product, K_τ for the name", "Kτ"),
        ("T_ s", "type a letter or a digit behind _, such as T_i", "T_"),
        ("T_{i s", "this bracket is not closed: type }", "{"),
        ("2/(s + 1", "this bracket is not closed: type )", "("),
        ("2/[(s + 1)", "this bracket is not closed: type ]", "["),
        ("(", "this bracket is not closed: type )", "("),
        ("(s + 1]", "] does not close this bracket: type )", "]"),
        ("s + 1)", ") closes nothing: remove it, or type the opening bracket", ")"),
        (")", ") closes nothing: remove it, or type the opening bracket", ")"),
        ("K ( )", "nothing between the brackets: type a number or a name", "( )"),
        ("s +", "nothing behind +: type a number, a name or a bracket", "+"),
        ("(s + )", "nothing behind +: type a number, a name or a bracket", "+"),
        ("2 s /", "nothing behind /: type a number, a name or a bracket", "/"),
        ("s^", "nothing behind ^: type a number, a name or a bracket", "^"),
        ("* s", "nothing before *: type a number, a name or a bracket", "*"),
        ("s + / 2", "nothing before /: type a number, a name or a bracket", "/"),
        ("1/(s+1)(s+2)", "unclear what stands below the slash: type 1/((s+1)(s+2)) or 1/(s+1)*(s+2)", "/(s+1)(s+2)"),
        ("14/2 s", "unclear what stands below the slash: type 14/(2 s) or 14/2*s", "/2 s"),
        ("s^0.5", "type a whole number from -400 to 400 as the exponent", "0.5"),
        ("2^s", "type a whole number from -400 to 400 as the exponent", "s"),
        ("s^(1 + 1)", "type a whole number from -400 to 400 as the exponent", "1 +"),
        ("s^401", "401 is out of range: type a whole number from -400 to 400 as the exponent", "401"),
        (
            "s^-99999999999999999999",
            "-99999999999999999999 is out of range: type a whole number from -400 to 400 as the exponent",
            "-99999999999999999999",
        ),
        ("s²⁻", "type a whole number from -400 to 400 as the exponent", "²⁻"),
        ("s^2^3", "put the first power in brackets, such as (s^2)^3", "^"),
        ("s²³^2", "put the first power in brackets, such as (s^2)^3", "^"),
    ];
    for (text, message, marked) in faults {
        assert_eq!(fault(text), (message.to_string(), marked.to_string()), "for {text:?}");
    }
}

#[test]
fn limits_are_kept() {
    let long = "s".repeat(MAXIMUM_LENGTH + 1);
    assert_eq!(read(&long).unwrap_err().to_string(), "2001 characters are too many: type at most 2000");
    let nested = |levels: usize| format!("{}s{}", "(".repeat(levels), ")".repeat(levels));
    assert!(read(&nested(MAXIMUM_DEPTH)).is_ok());
    assert_eq!(read(&nested(MAXIMUM_DEPTH + 1)).unwrap_err().to_string(), "nested too deep: type at most 64 levels");
    assert!(matches!(read(&"-".repeat(1900)), Err(NotationError::TooDeep { .. })));
    assert!(matches!(read(&format!("a{}", "/a".repeat(900))), Err(NotationError::TooDeep { .. })));
    assert!(read(&format!("a{}", "+a".repeat(900))).is_ok());
    let digits = "1".repeat(61);
    assert_eq!(read(&digits).unwrap_err().to_string(), "61 digits are out of range: type at most 60");
}

#[test]
fn a_decimal_is_one_number_with_a_sign() {
    assert_eq!(decimal(" −0.05 ").unwrap(), RBig::from_parts((-1).into(), 20u8.into()));
    assert_eq!(decimal("+3e2").unwrap(), RBig::from(300));
    let message = |text: &str| decimal(text).unwrap_err().to_string();
    assert_eq!(message("0,008"), "use a decimal point: 0.008");
    assert_eq!(message("1e99"), "1e99 is out of range: type an exponent from -60 to 60");
    assert_eq!(message("1/20"), "type a decimal, such as 0.05, instead of a fraction");
    assert_eq!(message("5 ms"), "type one number, such as 0.05");
    assert_eq!(message("--5"), "type one number, such as 0.05");
    assert_eq!(message(" "), "type a number, such as 0.05");
    assert_eq!(message("5 %"), "% is not part of the notation: type 0.05 for 5 %");
}

#[test]
fn a_symbol_is_one_name() {
    assert_eq!(symbol("Kp").unwrap(), "Kp");
    for text in ["", "s", "2", "K p", "K + 1", "e"] {
        assert!(matches!(symbol(text), Err(NotationError::NotASymbol { .. })), "{text:?}");
    }
}

#[test]
fn formulas_are_typeset() {
    let shown = |text: &str| mathml(&read(text).unwrap()).replace("<math>", "").replace("</math>", "");
    assert_eq!(
        shown("K (0.12 s − 1)"),
        "<mrow><mi>K</mi><mo>\u{2062}</mo><mrow><mo>(</mo><mrow><mrow><mn>0.12</mn><mo>\u{2062}</mo><mi>s</mi></mrow>\
         <mo>−</mo><mn>1</mn></mrow><mo>)</mo></mrow></mrow>"
    );
    assert_eq!(shown("(1)/(s)"), "<mfrac><mn>1</mn><mi>s</mi></mfrac>");
    assert_eq!(shown("ω_n²"), "<msup><msub><mi>ω</mi><mrow><mi>n</mi></mrow></msub><mn>2</mn></msup>");
    assert_eq!(shown("tau1"), "<mi>τ1</mi>");
    assert_eq!(shown("2*3"), "<mrow><mn>2</mn><mo>⋅</mo><mn>3</mn></mrow>");
    assert_eq!(shown("s^-1"), "<msup><mi>s</mi><mrow><mo>−</mo><mn>1</mn></mrow></msup>");
    assert_eq!(shown("e^(-s)"), "<msup><mi>e</mi><mrow><mo>−</mo><mi>s</mi></mrow></msup>");
    assert_eq!(
        shown("(1/s)^2"),
        "<msup><mrow><mo>(</mo><mfrac><mn>1</mn><mi>s</mi></mfrac><mo>)</mo></mrow><mn>2</mn></msup>"
    );
    assert_eq!(
        shown("2*-s"),
        "<mrow><mn>2</mn><mo>\u{2062}</mo><mrow><mo>(</mo><mrow><mo>−</mo><mi>s</mi></mrow><mo>)</mo></mrow></mrow>"
    );
}

/// Texts that look like blocks, to reach deeper than arbitrary characters do.
fn likely_text() -> impl Strategy<Value = String> {
    let pieces = proptest::sample::select(&[
        "s", "K", "tau", "τ", "T_i", "2", "0.5", "1e3", "e^(", "exp(", "(", ")", "[", "]", "+", "-", "*", "/", "^2",
        "²", "^-1", " ", ",", "_", "e", ".", "0,5", "^", "{", "}",
    ]);
    proptest::collection::vec(pieces, 0..60).prop_map(|pieces| pieces.concat())
}

/// Texts that are blocks.
fn valid_text() -> impl Strategy<Value = String> {
    let leaf = proptest::sample::select(&["s", "K", "τ", "T_i", "2", "0.5", "1e3", ".25"]).prop_map(String::from);
    leaf.prop_recursive(5, 40, 3, |inner| {
        let pair = (inner.clone(), inner.clone());
        prop_oneof![
            pair.clone().prop_map(|(a, b)| format!("{a} + {b}")),
            pair.clone().prop_map(|(a, b)| format!("-({a}) - {b}")),
            pair.clone().prop_map(|(a, b)| format!("({a})({b})")),
            pair.clone().prop_map(|(a, b)| format!("({a})*-({b})")),
            pair.clone().prop_map(|(a, b)| format!("({a})*{b}")),
            pair.clone().prop_map(|(a, b)| format!("({a})/({b})")),
            pair.prop_map(|(a, b)| format!("({a})/({b})/({a})*{b}")),
            (inner.clone(), -3i32..4).prop_map(|(a, n)| format!("({a})^{n}")),
            inner.prop_map(|a| format!("e^(-({a}) s)")),
        ]
    })
}

proptest! {
    #[test]
    fn an_expression_is_the_same_when_its_text_is_read_again(typed in valid_text()) {
        let block = read(&typed).unwrap();
        let again = read(&text(&block)).unwrap();
        prop_assert_eq!(outline(&again), outline(&block), "{} shown as {}", typed, text(&block));
        let open = mathml(&block).matches("<m").count();
        prop_assert_eq!(open, mathml(&block).matches("</m").count());
    }

    #[test]
    fn any_text_is_read_or_refused_with_a_place_inside(text in prop_oneof![any::<String>(), likely_text()]) {
        let length = text.chars().count();
        match read(&text) {
            Ok(block) => {
                prop_assert!(block.span.start < block.span.end && block.span.end <= length);
                prop_assert!(!mathml(&block).is_empty());
            }
            Err(error) => {
                let Span { start, end } = error.span();
                prop_assert!(start <= end && end <= length, "{start}..{end} of {length}: {error}");
                prop_assert!(start < end || length == 0, "{error} marks nothing");
                prop_assert!(!error.to_string().is_empty());
            }
        }
        let _ = (decimal(&text).map_err(|error| error.to_string()), symbol(&text).map_err(|error| error.to_string()));
    }

    #[test]
    fn a_typed_decimal_keeps_its_value(numerator in any::<i64>(), places in 0usize..20) {
        let scale = 10u128.pow(places as u32);
        let size = u128::from(numerator.unsigned_abs());
        let sign = if numerator < 0 { "-" } else { "" };
        let text = format!("{sign}{}.{:0places$}", size / scale, size % scale);
        prop_assert_eq!(decimal(&text).unwrap(), RBig::from_parts(numerator.into(), scale.into()));
    }
}
