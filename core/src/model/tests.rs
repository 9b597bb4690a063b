//! Tests of the model, named by behaviour. All loops are invented.

use super::*;
use crate::project::{Discretisation, Feedback, LoopText, PROJECT_FORMAT, Quantity, SamplingText};
use alloc::vec;
use dashu_int::IBig;
use proptest::prelude::*;

/// A project from its blocks, `name = value` rows separated by commas, and the knob.
fn project(blocks: [&str; 3], rows: &str, knob: &str) -> Project {
    let row = |row: &str| {
        let (symbol, value) = row.split_once('=').unwrap();
        Quantity { symbol: symbol.trim().into(), value: value.trim().into(), ..Quantity::default() }
    };
    let [controller, plant, sensor] = blocks.map(String::from);
    Project {
        format: PROJECT_FORMAT.into(),
        blocks: LoopText { controller, plant, sensor, feedback: Feedback::Negative, ..LoopText::default() },
        quantities: rows.split(';').filter(|row| row.contains('=')).map(row).collect(),
        knob: knob.into(),
        ..Project::default()
    }
}

/// F of controller `K`-loops, as text.
fn characteristic(blocks: [&str; 3], rows: &str) -> String {
    let model = build(&project(blocks, rows, "K")).unwrap_or_else(|problems| panic!("{blocks:?}: {problems:?}"));
    formula(&model.characteristic, "K")
}

/// A message with its field, symbol and marked characters.
type Told = (Field, Option<String>, Option<[usize; 2]>, String);

/// What is told about a project that cannot be built.
fn problems(project: &Project) -> Vec<Told> {
    let found = build(project).expect_err("problems");
    found.into_iter().map(|problem| (problem.field, problem.symbol, problem.span, problem.message)).collect()
}

/// The one message of a project.
fn only_problem(blocks: [&str; 3], rows: &str, knob: &str) -> Told {
    let mut found = problems(&project(blocks, rows, knob));
    assert_eq!(found.len(), 1, "{found:?}");
    found.remove(0)
}

fn in_block(field: Field, start: usize, end: usize, message: &str) -> Told {
    (field, None, Some([start, end]), message.to_string())
}

#[test]
fn the_characteristic_polynomial_is_denominator_plus_numerator() {
    assert_eq!(characteristic(["K", "1/(s(s+2))", "1"], ""), "s^2 + 2 s + K");
    assert_eq!(characteristic(["K (0.5 s + 1)", "3/(s - 1)", "2"], ""), "(3 K + 1) s + (6 K - 1)");
    // By hand: (3 s + 250)(s - 3)(s + 9)(s + 125) + 7·(30 s + 250)·125 K.
    assert_eq!(
        characteristic(["K (0.12 s + 1)/(0.012 s + 1)", "14/((s - 3)(s + 9)(τ s + 1))", "0.5"], "tau = 0.008"),
        "3 s^4 + 643 s^3 + 34919 s^2 + (26250 K + 170625) s + (218750 K - 843750)"
    );
}

#[test]
fn positive_feedback_subtracts() {
    let mut positive = project(["K", "1/(s + 2)", "1"], "", "K");
    positive.blocks.feedback = Feedback::Positive;
    assert_eq!(formula(&build(&positive).unwrap().characteristic, "K"), "s - (K - 2)");
}

#[test]
fn the_knob_may_stand_anywhere() {
    let ofn = |blocks, rows, knob| formula(&build(&project(blocks, rows, knob)).unwrap().characteristic, knob);
    let blocks = ["Kp (1 + 1/(T_i s))", "2/(tau s + 1)", "1"];
    assert_eq!(ofn(blocks, "Kp = 3; tau = 0.5", "T_i"), "T_i s^2 + 14 T_i s + 12");
    assert_eq!(ofn(blocks, "Kp = 3; T_i = 4", "tau"), "2 tau s^2 + 14 s + 3");
    assert_eq!(ofn(["K", "1/s", "1"], "K = 2", "other"), "s + 2");
    let squared = build(&project(["K (s + K)", "1/s^2", "1"], "", "K")).unwrap();
    assert_eq!(squared.characteristic.knob_degree(), 2);
    assert_eq!(squared.characteristic.at_knob_power(2), [IBig::from(1)]);
    assert_eq!(squared.characteristic.at_knob_power(1), [IBig::from(0), IBig::from(1)]);
}

#[test]
fn a_greek_row_names_the_spelled_quantity() {
    assert_eq!(characteristic(["K", "1/(tau s + 1)", "1"], "τ = 2"), "2 s + (K + 1)");
}

#[test]
fn sums_get_no_second_pole_and_cancelled_factors_stay() {
    assert_eq!(characteristic(["K", "1/(s+1) + 1/(s+1)", "1"], ""), "s + (2 K + 1)");
    assert_eq!(characteristic(["K", "1/(s+1) + 1/(2 s+2)", "1"], ""), "2 s + (3 K + 2)");
    assert_eq!(characteristic(["K", "1/(s^2+3 s+2) + 1/(s+1)", "1"], ""), "s^2 + (K + 3) s + (3 K + 2)");
    assert_eq!(characteristic(["K", "1/(K s+1) + 1/(K s+1)", "1"], ""), "K s + (2 K + 1)");
    assert_eq!(characteristic(["K", "1/(K^2 - 1) + 1/(K - 1) + 1/(s (K + 1))", "1"], ""), {
        // K(1 + (K + 1))/(K² − 1) + K(K − 1)/(s(K² − 1)): (K² − 1)s + (K² + 2K)s + K² − K.
        "-(2 K^2 + 2 K - 1) s - (K^2 - K)"
    });
    // The same factor above and below is a fixed mode.
    assert_eq!(characteristic(["K (s + 1)/(s + 1)", "1/s", "1"], ""), "s^2 + (K + 1) s + K");
    assert_eq!(characteristic(["K (s + 1)", "1/(s^2 + s)", "1"], ""), "s^2 + (K + 1) s + K");
    let fixed = build(&project(["K", "(s-1)/((s-1)(s+2))", "1"], "", "K")).unwrap();
    assert_eq!((fixed.open_loop.zero_count(), fixed.open_loop.pole_count()), (1, 2));
}

#[test]
fn compound_fractions_are_cleared() {
    // An inner loop: G/(1 + G) with G = 1/(s + 1) has one pole, at −2.
    assert_eq!(characteristic(["K", "(1/(s+1))/(1 + 1/(s+1))", "1"], ""), "s + (K + 2)");
    assert_eq!(characteristic(["K", "(1 + 1/s)^-1", "1"], ""), "(K + 1) s + 1");
}

#[test]
fn a_zero_block_leaves_the_poles() {
    assert_eq!(characteristic(["K", "0/(s + 3)", "1/(s + 1)"], ""), "s^2 + 4 s + 3");
    assert_eq!(characteristic(["K", "(0 s)/(s + 3)", "1"], ""), "s + 3");
}

#[test]
fn a_factor_in_the_knob_alone_is_divided_out_and_told() {
    let model = build(&project(["1/K", "K/(K s + K)", "1"], "", "K")).unwrap();
    assert_eq!(formula(&model.characteristic, "K"), "K s + (K + 1)");
    assert_eq!(model.knob_factor.as_deref(), Some("K"));
    assert_eq!(build(&project(["K", "1/s", "1"], "", "K")).unwrap().knob_factor, None);
}

#[test]
fn the_sign_is_positive_where_highest_order_meets_lowest_knob_power() {
    assert_eq!(characteristic(["K", "1/(1 - s)", "1"], ""), "s - (K + 1)");
    assert_eq!(characteristic(["K s - 1", "1/(s + 2)", "-1"], ""), "-(K - 1) s + 3");
}

#[test]
fn every_fault_of_a_block_is_told_at_its_field() {
    let found = problems(&project(["K (s + 1", "0,5/s", ""], "", "K"));
    assert_eq!(
        found,
        [
            in_block(Field::Controller, 2, 3, "this bracket is not closed: type )"),
            in_block(Field::Plant, 0, 3, "use a decimal point: 0.5"),
            in_block(Field::Sensor, 0, 0, "type a transfer function, such as 2/(s + 1)"),
        ]
    );
}

#[test]
fn division_by_zero_names_what_is_zero() {
    let zero = "division by zero: this is zero for every s; change it";
    assert_eq!(only_problem(["K", "1/(s - s)", "1"], "", "K"), in_block(Field::Plant, 2, 9, zero));
    assert_eq!(only_problem(["K", "0^-1", "1"], "", "K"), in_block(Field::Plant, 0, 1, zero));
    assert_eq!(
        only_problem(["K", "1/(s (τ - 0.1))", "1"], "tau = 0.10", "K"),
        in_block(Field::Plant, 2, 15, "division by zero for tau = 0.10: change tau or this denominator")
    );
    assert_eq!(only_problem(["K", "1/(a - a)", "1"], "a = 3", "K"), in_block(Field::Plant, 2, 9, zero));
}

#[test]
fn names_without_value_are_asked_for() {
    let found = problems(&project(["K", "g/(tau s2 + 1)", "1"], "g = ; tau = 0,8", "K"));
    let row =
        |symbol: &str, span, message: &str| (Field::Quantity, Some(symbol.to_string()), span, message.to_string());
    assert_eq!(
        found,
        [
            row("g", None, "give a value for g: type a number in the quantities table"),
            row("tau", Some([0, 3]), "use a decimal point: 0.8"),
            row("s2", None, "give a value for s2: type a number in the quantities table, or s^2 for the power"),
        ]
    );
}

#[test]
fn rows_are_checked() {
    let row = |symbol: &str, message: &str| (Field::Quantity, Some(symbol.to_string()), None, message.to_string());
    assert_eq!(
        only_problem(["K", "1/(tau s + 1)", "1"], "tau = 1; τ = 2; tau = 3", "K"),
        row("τ", "tau stands in two rows: keep one")
    );
    assert_eq!(
        only_problem(["K", "1/s", "1"], "s = 1", "K"),
        row("s", "s is the Laplace variable and has no value: remove this row")
    );
    // Rows that no block uses may hold anything.
    assert!(build(&project(["K", "1/s", "1"], "unused = 1,2; 5 % = 3; = 4", "K")).is_ok());
}

#[test]
fn the_knob_is_asked_for() {
    let knob = |message: &str| (Field::Knob, None, None, message.to_string());
    let blocks = ["K", "1/s", "1"];
    assert_eq!(only_problem(blocks, "", " "), knob("choose the knob: the quantity left to choose"));
    assert_eq!(only_problem(blocks, "K = 1", "s"), knob("s is the Laplace variable: choose a quantity as the knob"));
    assert_eq!(
        only_problem(blocks, "K = 1", "2 K"),
        knob("choose one quantity as the knob: type one name, such as K or tau_m")
    );
}

#[test]
fn the_setting_is_an_exact_decimal() {
    let mut project = project(["K", "1/s", "1"], "", "K");
    assert_eq!(build(&project).unwrap().setting, None);
    project.setting.value = "−0.5".into();
    assert_eq!(build(&project).unwrap().setting, Some(RBig::from_parts((-1).into(), 2u8.into())));
    project.setting.value = "1e61".into();
    let message = "1e61 is out of range: type an exponent from -60 to 60";
    assert_eq!(problems(&project), [(Field::Setting, Some("value".into()), Some([0, 4]), message.into())]);
}

#[test]
fn blocks_that_are_no_ratio_of_polynomials_are_refused() {
    assert_eq!(
        only_problem(["K exp(2)", "1/s", "1"], "", "K"),
        in_block(Field::Controller, 2, 8, "not a ratio of polynomials in s: type the value of exp(2) as a decimal")
    );
}

/// The dead times of controller, plant and sensor at knob 10.
fn dead_times(project: &Project) -> [RBig; 3] {
    build(project).unwrap().blocks.each_ref().map(|block| block.dead_time.at(&RBig::from(10)))
}

#[test]
fn dead_times_of_blocks_and_field_add_up() {
    let tenths = |n: i32| RBig::from_parts(n.into(), 10u8.into());
    let mut heater = project(["K", "2.5 e^(-0.2 s)/(4 s + 1)", "exp(-T s)"], "T = 0.3", "K");
    assert_eq!(dead_times(&heater), [tenths(0), tenths(2), tenths(3)]);
    heater.blocks.dead_time = "2 T".into();
    assert_eq!(dead_times(&heater), [tenths(0), tenths(8), tenths(3)]);
    let pade_free = project(["K", "(e^(-0.1 s))^3 e^(-s)/(e^(-s/2) (s + 1)) + e^(-0.8 s)/s", "1"], "", "K");
    assert_eq!(dead_times(&pade_free)[1], tenths(8));
    heater.knob = "T".into();
    heater.quantities = project(["K", "1/s", "1"], "K = 2", "T").quantities;
    assert_eq!(dead_times(&heater), [tenths(0), tenths(202), tenths(100)]);
}

#[test]
fn what_is_no_dead_time_says_what_to_type() {
    let mixed =
        "this adds paths with different dead times: a block may have one dead time, as a factor of the whole block";
    assert_eq!(only_problem(["K", "1/s + e^(-s)/(s + 1)", "1"], "", "K"), in_block(Field::Plant, 6, 20, mixed));
    let ahead = "this answers before it is asked: type a dead time with a negative exponent, such as e^(-0.2 s)";
    assert_eq!(only_problem(["K", "e^(2 s)/s", "1"], "", "K"), in_block(Field::Plant, 0, 9, ahead));
    let other = "e^(-s^2) is no dead time: type e^(-T s) with a time T, such as e^(-0.2 s)";
    assert_eq!(only_problem(["K", "e^(-s^2)", "1/s"], "", "K"), in_block(Field::Plant, 0, 8, other));
    let mut late = project(["K", "1/s", "1"], "", "K");
    late.blocks.dead_time = "-1".into();
    let message = "a dead time is never negative: type the time as a positive number";
    assert_eq!(problems(&late), [(Field::DeadTime, None, None, message.into())]);
    late.blocks.dead_time = "1/s".into();
    let message = "type a time in seconds, such as 0.2, or the name of a quantity";
    assert_eq!(problems(&late), [(Field::DeadTime, None, None, message.into())]);
}

/// A loop with a sampled controller.
fn sampled(controller: &str, sampling: SamplingText) -> Project {
    let mut project = project([controller, "1/(s (s + 1))", "1"], "", "K");
    project.blocks.sampling = Some(sampling);
    project
}

#[test]
fn a_controller_in_z_needs_sampling_and_stands_alone() {
    let period = |text: &str| SamplingText { period: text.into(), ..SamplingText::default() };
    let found = build(&sampled("K (z - 0.9)/(z - 0.2)", period("0.01"))).unwrap();
    let sampling = found.sampling.unwrap();
    assert!(sampling.controller_in_z && sampling.delay.is_zero());
    assert_eq!(sampling.period, RBig::from_parts(1.into(), 100u8.into()));
    assert!(!build(&sampled("K", period("0.01"))).unwrap().sampling.unwrap().controller_in_z);
    let off = "z belongs to a sampled controller: turn Sampling on and type its period, or write the controller in s";
    assert_eq!(only_problem(["K/z", "1/s", "1"], "", "K"), in_block(Field::Controller, 2, 3, off));
    let plant = "only the controller may stand in z: write this block in s; the conversion is exact";
    assert_eq!(only_problem(["K", "1/z", "1/s"], "", "K"), in_block(Field::Plant, 2, 3, plant));
    let message = "s and z in one controller: write it in one of the two; a delay in z is typed as 1/z, or as the \
                   computation delay";
    assert_eq!(
        problems(&sampled("K/(z s)", period("0.01"))),
        [(Field::Controller, None, Some([5, 6]), message.into())]
    );
    let message = "this needs samples that are not yet taken: give the controller as many poles as zeros, such as \
                   K (z - 0.9)/z";
    assert_eq!(problems(&sampled("K (z - 0.9)", period("0.01"))), [(Field::Controller, None, None, message.into())]);
}

#[test]
fn the_inputs_of_the_sampling_are_checked() {
    let complaint = |period: &str, delay: &str, method, prewarp: &str| {
        let [period, delay, prewarp] = [period, delay, prewarp].map(String::from);
        let found = problems(&sampled("K", SamplingText { period, delay, method, prewarp }));
        assert_eq!(found.len(), 1, "{found:?}");
        let (field, part, _, message) = found[0].clone();
        assert_eq!(field, Field::Sampling);
        (part.unwrap(), message)
    };
    let tustin = Discretisation::Tustin;
    let says = |part: &str, message: &str| (part.to_string(), message.to_string());
    let missing = says("period", "type the sample period in seconds, such as 0.002");
    assert_eq!(complaint("", "", tustin, ""), missing);
    assert_eq!(complaint("0", "", tustin, ""), says("period", "the sample period must be above zero"));
    assert_eq!(complaint("0,1", "", tustin, ""), says("period", "use a decimal point: 0.1"));
    let delay = says("delay", "type the computation delay in sample periods, from 0 to 3");
    assert_eq!(complaint("1", "3.5", tustin, ""), delay);
    let knob = says("period", "this must be a number: use quantities with values, neither s, z nor the knob");
    assert_eq!(complaint("K", "", tustin, ""), knob);
    let high = says("prewarp", "the frequency must stay below half the sampling frequency, π over the period");
    assert_eq!(complaint("1", "", Discretisation::TustinPrewarped, "4"), high);
}

#[test]
fn loops_beyond_the_limits_are_refused_at_once() {
    let about_loop = |message: &str| (Field::Loop, None, None, message.to_string());
    assert_eq!(
        only_problem(["K", "1/((s+1)^40 (s+2)^7)", "1"], "", "K"),
        about_loop("the loop has order 47; Stayband treats up to 40")
    );
    assert_eq!(
        only_problem(["K", "1/((s+1)^40)^40", "1"], "", "K"),
        about_loop("the loop has order 1600; Stayband treats up to 40")
    );
    assert_eq!(
        only_problem(["K", "1/((((s+1)^40)^40)^40)^40", "1"], "", "K"),
        in_block(Field::Plant, 2, 25, "this has order 2560000; Stayband treats up to 40")
    );
    assert_eq!(
        only_problem(["K", "1/((s+1)^40 (s+1) s^-1 + 1)", "1"], "", "K"),
        in_block(Field::Plant, 2, 27, "this has order 41; Stayband treats up to 40")
    );
    assert_eq!(
        only_problem(["K^13", "1/s", "1"], "", "K"),
        about_loop("the knob appears to the power 13 in the loop; Stayband treats up to 12")
    );
    assert_eq!(
        only_problem(["K", "((1e60^40)^40) s", "1"], "", "K"),
        in_block(Field::Plant, 0, 14, "the numbers here are out of range: type fewer digits or smaller powers")
    );
    assert!(build(&project(["K", "1/(1e-9 s + 1)^40", "1"], "", "K")).is_ok());
}

#[test]
fn loops_without_poles_are_refused() {
    let about_loop = |message: &str| (Field::Loop, None, None, message.to_string());
    assert_eq!(only_problem(["K", "2", "1"], "", "K"), about_loop("the loop has no poles: type a block with s in it"));
    let mut positive = project(["1", "(s + 1)/(s + 1)", "1"], "", "K");
    positive.blocks.feedback = Feedback::Positive;
    assert_eq!(
        problems(&positive),
        [about_loop(
            "the open loop is the constant that makes every s a closed-loop pole: change a block or the sign of the feedback"
        )]
    );
    positive.blocks.plant = "(s + 1)/(s + 2)".into();
    assert_eq!(
        problems(&positive),
        [about_loop(
            "the closed loop has no poles, because all powers of s cancel: change a block or the sign of the feedback"
        )]
    );
}

#[test]
fn improper_blocks_are_noticed() {
    let model = build(&project(["K (1 + 0.1 s)", "2/(s + 1)^2", "1"], "", "K")).unwrap();
    let text = "the controller is improper, with 1 zero and 0 poles: no device can be built like that; add 1 filter pole, \
                such as 1/(0.01 s + 1)";
    assert_eq!(model.notices, [Notice { kind: NoticeKind::ImproperBlock, text: text.into() }]);
    let mut algebraic = project(["1", "s^2/(s^2 + s + 1)", "1"], "", "K");
    algebraic.blocks.feedback = Feedback::Positive;
    assert_eq!(build(&algebraic).unwrap().notices[0].kind, NoticeKind::AlgebraicLoop);
}

#[test]
fn what_can_be_read_is_shown_beside_faults() {
    let shown = reading(&project(["K (1 + 1/(T s))", "1/(", "τ"], "", ""));
    assert!(shown.controller.is_some_and(|text| text.contains("<mfrac>")));
    assert_eq!(shown.plant, None);
    assert_eq!(shown.sensor.as_deref(), Some("<math><mi>τ</mi></math>"));
    assert_eq!(shown.names, ["K", "T", "tau"]);
}

#[test]
fn the_record_holds_integers_and_the_equation() {
    let model = build(&project(["K", "1/(s - 2)", "1"], "", "K")).unwrap();
    let record = record(&model);
    assert_eq!((record.order, record.knob_degree), (1, 1));
    assert_eq!(record.coefficients, [vec!["-2", "1"], vec!["1"]]);
    let left = "<mi>F</mi><mo>\u{2061}</mo><mrow><mo>(</mo><mi>s</mi><mo>)</mo></mrow>";
    let sum =
        "<mrow><mi>s</mi><mo>+</mo><mrow><mo>(</mo><mrow><mi>K</mi><mo>−</mo><mn>2</mn></mrow><mo>)</mo></mrow></mrow>";
    assert_eq!(record.mathml, format!("<math>{left}<mo>=</mo>{sum}<mo>=</mo><mn>0</mn></math>"));
}

#[test]
fn long_integers_are_shown_rounded() {
    let shown = |integer: &str| formula(&KnobPolynomial::new(vec![vec![integer.parse().unwrap()]]), "K");
    assert_eq!(shown("123456789012"), "123456789012");
    assert_eq!(shown("-1234567890123"), "-1.23457*10^12");
    assert_eq!(shown("9999999999999"), "1*10^13");
}

/// Pieces of blocks that evaluate to something more often than not.
fn block() -> impl Strategy<Value = String> {
    let leaf = proptest::sample::select(&["s", "K", "tau", "a", "2", "0.5", "0", "1e3", "s", "(s + 1)", "(s - 1)"]);
    leaf.prop_map(String::from).prop_recursive(5, 30, 3, |inner| {
        let pair = (inner.clone(), inner.clone());
        prop_oneof![
            pair.clone().prop_map(|(a, b)| format!("({a} + {b})")),
            pair.clone().prop_map(|(a, b)| format!("({a} - ({b}))")),
            pair.clone().prop_map(|(a, b)| format!("({a})*({b})")),
            pair.prop_map(|(a, b)| format!("({a})/({b})")),
            (inner, -3i32..9).prop_map(|(a, n)| format!("({a})^{n}")),
        ]
    })
}

fn any_block() -> impl Strategy<Value = String> {
    prop_oneof![4 => block(), 1 => any::<String>()]
}

/// The value of an expression for s = x, by rational arithmetic without polynomials. None where it divides by zero.
fn value_at(expression: &Expression, x: &RBig, knob: &RBig, others: &RBig) -> Option<RBig> {
    use crate::notation::{Node, Sign};
    let part = |expression| value_at(expression, x, knob, others);
    Some(match &expression.node {
        Node::Number(number) => number.value.clone(),
        Node::Laplace | Node::Advance => x.clone(),
        Node::Name(name) => {
            if name == "K" {
                knob.clone()
            } else {
                others.clone()
            }
        }
        Node::Negation(inner) => -part(inner)?,
        Node::Sum(terms) => terms.iter().try_fold(RBig::ZERO, |sum, term| {
            let value = part(&term.expression)?;
            Some(if term.sign == Sign::Plus { sum + value } else { sum - value })
        })?,
        Node::Product(factors) => {
            factors.iter().try_fold(RBig::ONE, |product, factor| Some(product * part(factor)?))?
        }
        Node::Quotient(above, below) => {
            let (above, below) = (part(above)?, part(below)?);
            if below.is_zero() {
                return None;
            } else {
                above / below
            }
        }
        Node::Power(base, exponent) => {
            let base = part(base)?;
            if base.is_zero() && *exponent < 0 {
                return None;
            } else {
                base.pow(*exponent as isize)
            }
        }
        Node::Exponential(_) => return None,
    })
}

fn polynomial_at(rows: &[Vec<IBig>], x: &RBig, knob: &RBig) -> RBig {
    rows.iter().rev().fold(RBig::ZERO, |sum, row| {
        let coefficient = row.iter().rev().fold(RBig::ZERO, |sum, value| sum * knob + RBig::from(value.clone()));
        sum * x + coefficient
    })
}

fn factors_at(factors: &[Factor], x: &RBig, knob: &RBig) -> RBig {
    factors.iter().fold(RBig::ONE, |product, factor| {
        product * polynomial_at(factor.polynomial.coefficients(), x, knob).pow(factor.exponent as isize)
    })
}

proptest! {
    #[test]
    fn any_project_is_built_or_refused(
        controller in any_block(), plant in any_block(), sensor in any_block(),
        tau in any::<String>(), knob in prop_oneof![4 => Just("K".to_string()), 1 => any::<String>()],
        positive in any::<bool>(),
    ) {
        let mut typed = project([&controller, &plant, &sensor], "a = 0", &knob);
        typed.quantities.push(Quantity { symbol: "tau".into(), value: tau, ..Quantity::default() });
        typed.blocks.feedback = if positive { Feedback::Positive } else { Feedback::Negative };
        let _ = reading(&typed);
        match build(&typed) {
            Ok(model) => {
                let order = model.characteristic.order();
                prop_assert!((1..=MAXIMUM_ORDER).contains(&order));
                prop_assert_eq!(record(&model).coefficients.len(), order + 1);
            }
            Err(problems) => prop_assert!(!problems.is_empty()),
        }
    }

    #[test]
    fn factors_and_characteristic_have_the_value_of_the_typed_loop(
        controller in block(), plant in block(), x in -40i32..40, knob in -40i32..40,
    ) {
        let typed = project([&controller, &plant, "1"], "tau = 0.25; a = 0.25", "K");
        let Ok(model) = build(&typed) else { return Ok(()) };
        // Points between the small integers, where no pole of these blocks lies.
        let x = RBig::from_parts((13 * x + 5).into(), 17u8.into());
        let knob = RBig::from_parts((11 * knob + 3).into(), 19u8.into());
        let other = RBig::from_parts(1.into(), 4u8.into());
        let value = |text: &str| value_at(&notation::read(text).unwrap(), &x, &knob, &other);
        let (Some(first), Some(second)) = (value(&controller), value(&plant)) else { return Ok(()) };
        let open_loop = &model.open_loop;
        let above = &open_loop.constant * factors_at(&open_loop.numerator, &x, &knob);
        let below = factors_at(&open_loop.denominator, &x, &knob);
        prop_assert!(!below.is_zero());
        prop_assert_eq!(&above / &below, first * second);
        // F·(factor in the knob)·constant = D + N: compare the ratio at two values of s.
        let second_x = &x + RBig::ONE;
        let sum = |x: &RBig| {
            let above = &open_loop.constant * factors_at(&open_loop.numerator, x, &knob);
            above + factors_at(&open_loop.denominator, x, &knob)
        };
        let found = |x: &RBig| polynomial_at(model.characteristic.coefficients(), x, &knob);
        prop_assert_eq!(sum(&x) * found(&second_x), sum(&second_x) * found(&x));
    }
}
