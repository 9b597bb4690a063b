use stayband_core::answer::Session;
use std::time::Instant;
fn main() {
    let args: Vec<String> = std::env::args().collect();
    let json = format!(r#"{{"format":"stayband-project/1","loop":{{"controller":"{}","plant":"{}"}},"quantities":[{{"symbol":"tau","value":"0.008"}}],"knob":"K","setting":{{"value":"37"}}}}"#, args[1], args[2]);
    let mut s = Session::new();
    for _ in 0..20 { s = Session::new(); let _ = s.solve(&json, None); }
    let mut s2 = Session::new();
    let t = Instant::now();
    let solved = s2.solve(&json, None);
    let e = t.elapsed();
    println!("{}", serde_json::to_string_pretty(&solved.answer).unwrap());
    for b in solved.branches { println!("{:?} {} pts  {:?} -> {:?}", b.sign, b.points.len(), b.points[0], b.points.last().unwrap()); }
    println!("{:?}", e);
    let t = Instant::now();
    for _ in 0..100 { let mut s = Session::new(); let _ = s.solve(&json, None); }
    println!("mean {:?}", t.elapsed()/100);
}
