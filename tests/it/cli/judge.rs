//! `judge`.

use expect_test::expect;

use super::{check, run};

const ROWS: &str = "\
shelf,switch,marking,dial,dark_from,dark_to,lamp,family,temperature,finding,note
7,mid,473K,6.3,,,,pet,19,old,one reading
7,mid,473K,6.2/6.3/6.2,,,,pet,,old,repeats
8,mid,473K,,6.05,6.35/6.4,,pet,,old,both edges
8,mid,473K,1,6.35,6.05,,pet,,old,edges win over the dial
8,high,4n7,,9.4,stop,,,,old,a cut arc
8,mid,473K,,0,10,,pet,,old,from stop to stop
8,mid,473K,6.25,,,dark,pet,,old,parked
8,mid,473K,6.25,,,lit,pet,,old,parked
8,mid,473K,,,,never,pet,,old,never dark
8,mid,473K,6.3,,,never,pet,,old,dimmest there
8,mid,473K,,,,always,pet,,old,always dark
8,low,473K,6.3,,,,pet,,old,the wrong switch
9,mid,-20+80%,\"4,2\",,,,,,old,=1+1
";

#[test]
fn judge_writes_what_it_read_and_what_it_found() {
    check(
        &["judge", "--meter", "meter.toml", "-"],
        ROWS,
        expect![[r#"
            shelf,switch,marking,dial,dark_from,dark_to,lamp,family,temperature,note,nominal_pF,low_pF,high_pF,limits_from,capacitance_pF,uncertainty_pF,loss,loss_below,deviation_percent,probability_inside,probability_flat,reading_probability,finding,compartment,remark
            7,mid,473K,6.3,,,,pet,19,one reading,47000,42300,51700,marked,47438.6261606,500.711983082,,,0.933247150223,1,1,0.999997791495,inside,,
            7,mid,473K,6.2/6.3/6.2,,,,pet,,repeats,47000,42300,51700,marked,46881.3793109,453.62739297,,,-0.252384444797,1,1,0.99999783378,inside,,
            8,mid,473K,,6.05,6.35/6.4,,pet,,both edges,47000,42300,51700,marked,46704.2605727,423.810135451,,0.0235517471152,-0.629232824092,1,1,0.999997825459,inside,,
            8,mid,473K,1,6.35,6.05,,pet,,edges win over the dial,47000,42300,51700,marked,46604.4534306,431.509798331,,0.0249941613201,-0.841588445576,1,1,0.999997811631,inside,,
            8,high,4n7,,9.4,stop,,,,a cut arc,4700,3760,5640,assumed,4240.67337579,46.3431163837,,,-9.77290689808,1,1,0.999971463743,inside,,no tolerance marked: ±20 % assumed
            8,mid,473K,,0,10,,pet,,from stop to stop,47000,42300,51700,marked,,,,,,,,0.999620155448,undecided,,"dark everywhere: lamp, oscillator or wiring: check that the lamp lights with open terminals"
            8,mid,473K,6.25,,,dark,pet,,parked,47000,42300,51700,marked,,,,,,0.999999999998,0.999999999985,0.999997717458,inside,,between 44.8 nF and 49.5 nF
            8,mid,473K,6.25,,,lit,pet,,parked,47000,42300,51700,marked,,,,,,0.695523522277,,0.999423301325,undecided,,not between 46.8 nF and 47.3 nF; next: turn the dial and read the middle of the dark arc
            8,mid,473K,,,,never,pet,,never dark,47000,42300,51700,marked,,,,,,,,0.999620155448,undecided,,"never dark: too much loss (leaky, dried out, burnt), or an open part or no contact; next: find the dimmest place"
            8,mid,473K,6.3,,,never,pet,,dimmest there,47000,42300,51700,marked,47484.7263237,1034.15502942,,,1.03133260372,0.999996497381,0.999976829734,0.999997642432,inside,,"never dark: too much loss (leaky, dried out, burnt), or a distorted sine; next: measure its leakage; loss at least 0.029, above its limit"
            8,mid,473K,,,,always,pet,,always dark,47000,42300,51700,marked,,,,,,,,0.999620155448,undecided,,"dark everywhere: lamp, oscillator or wiring: check that the lamp lights with open terminals"
            8,low,473K,6.3,,,,pet,,the wrong switch,47000,42300,51700,marked,771014.926868,8136.52127314,,,1540.45729121,0,0,0,undecided,,switch mid?; far from every reading of this marking
            9,mid,'-20+80%,"4,2",,,,,,'=1+1,,,,,30573.8976139,388.896419754,,,,,,,undecided,,nothing in the marking is a value: measured only
            exit 0
        "#]],
    );
    check(
        &[
            "judge",
            "--meter",
            "meter.toml",
            "--tray",
            "tray.toml",
            "--json",
            "-",
        ],
        ROWS,
        expect![[r#"
            [
            {"shelf":"7","switch":"mid","marking":"473K","dial":6.3,"dark_from":null,"dark_to":null,"lamp":null,"family":"pet","temperature":19,"note":"one reading","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":47438.6261606,"uncertainty_pF":500.711983082,"loss":null,"loss_below":null,"deviation_percent":0.933247150223,"probability_inside":0.99995882329,"probability_flat":0.999932530442,"reading_probability":0.999997791495,"finding":"inside","compartment":"A1","remark":"limits by house rule, marked tolerance ±10 %"},
            {"shelf":"7","switch":"mid","marking":"473K","dial":"6.2/6.3/6.2","dark_from":null,"dark_to":null,"lamp":null,"family":"pet","temperature":null,"note":"repeats","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":46881.3793109,"uncertainty_pF":453.62739297,"loss":null,"loss_below":null,"deviation_percent":-0.252384444797,"probability_inside":0.999999719525,"probability_flat":0.999999538646,"reading_probability":0.99999783378,"finding":"inside","compartment":"A1","remark":"limits by house rule, marked tolerance ±10 %"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":null,"dark_from":6.05,"dark_to":"6.35/6.4","lamp":null,"family":"pet","temperature":null,"note":"both edges","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":46704.2605727,"uncertainty_pF":423.810135451,"loss":null,"loss_below":0.0235517471152,"deviation_percent":-0.629232824092,"probability_inside":0.999999616927,"probability_flat":0.999999373467,"reading_probability":0.999997825459,"finding":"inside","compartment":"A1","remark":"limits by house rule, marked tolerance ±10 %"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":1,"dark_from":6.35,"dark_to":6.05,"lamp":null,"family":"pet","temperature":null,"note":"edges win over the dial","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":46604.4534306,"uncertainty_pF":431.509798331,"loss":null,"loss_below":0.0249941613201,"deviation_percent":-0.841588445576,"probability_inside":0.9999981845,"probability_flat":0.999997041452,"reading_probability":0.999997811631,"finding":"inside","compartment":"A1","remark":"limits by house rule, marked tolerance ±10 %"},
            {"shelf":"8","switch":"high","marking":"4n7","dial":null,"dark_from":9.4,"dark_to":"stop","lamp":null,"family":null,"temperature":null,"note":"a cut arc","nominal_pF":4700,"low_pF":3760,"high_pF":5640,"limits_from":"house","capacitance_pF":4240.67337579,"uncertainty_pF":46.3431163837,"loss":null,"loss_below":null,"deviation_percent":-9.77290689808,"probability_inside":1,"probability_flat":1,"reading_probability":0.999971463743,"finding":"inside","compartment":"A2","remark":"limits by house rule, usual tolerance ±20 %"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":null,"dark_from":0,"dark_to":10,"lamp":null,"family":"pet","temperature":null,"note":"from stop to stop","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":null,"uncertainty_pF":null,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":null,"probability_flat":null,"reading_probability":0.999620155448,"finding":"undecided","compartment":"no place","remark":"dark everywhere: lamp, oscillator or wiring: check that the lamp lights with open terminals; limits by house rule, marked tolerance ±10 %; nearest is A1 film, inside, but for its finding"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":6.25,"dark_from":null,"dark_to":null,"lamp":"dark","family":"pet","temperature":null,"note":"parked","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":null,"uncertainty_pF":null,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":0.997557577563,"probability_flat":0.996011324226,"reading_probability":0.999997717458,"finding":"inside","compartment":"A1","remark":"limits by house rule, marked tolerance ±10 %; between 44.8 nF and 49.5 nF"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":6.25,"dark_from":null,"dark_to":null,"lamp":"lit","family":"pet","temperature":null,"note":"parked","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":null,"uncertainty_pF":null,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":0.338285986711,"probability_flat":null,"reading_probability":0.999423301325,"finding":"undecided","compartment":"no place","remark":"limits by house rule, marked tolerance ±10 %; not between 46.8 nF and 47.3 nF; next: turn the dial and read the middle of the dark arc; nearest is A1 film, inside, but for its finding"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":null,"dark_from":null,"dark_to":null,"lamp":"never","family":"pet","temperature":null,"note":"never dark","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":null,"uncertainty_pF":null,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":null,"probability_flat":null,"reading_probability":0.999620155448,"finding":"undecided","compartment":"no place","remark":"never dark: too much loss (leaky, dried out, burnt), or an open part or no contact; next: find the dimmest place; limits by house rule, marked tolerance ±10 %; nearest is A1 film, inside, but for its finding"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":6.3,"dark_from":null,"dark_to":null,"lamp":"never","family":"pet","temperature":null,"note":"dimmest there","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":47484.7263237,"uncertainty_pF":1034.15502942,"loss":null,"loss_below":null,"deviation_percent":1.03133260372,"probability_inside":0.977698085971,"probability_flat":0.961296759756,"reading_probability":0.999997642432,"finding":"inside","compartment":"A1","remark":"never dark: too much loss (leaky, dried out, burnt), or a distorted sine; next: measure its leakage; limits by house rule, marked tolerance ±10 %; loss at least 0.029, above its limit"},
            {"shelf":"8","switch":"mid","marking":"473K","dial":null,"dark_from":null,"dark_to":null,"lamp":"always","family":"pet","temperature":null,"note":"always dark","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":null,"uncertainty_pF":null,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":null,"probability_flat":null,"reading_probability":0.999620155448,"finding":"undecided","compartment":"no place","remark":"dark everywhere: lamp, oscillator or wiring: check that the lamp lights with open terminals; limits by house rule, marked tolerance ±10 %; nearest is A1 film, inside, but for its finding"},
            {"shelf":"8","switch":"low","marking":"473K","dial":6.3,"dark_from":null,"dark_to":null,"lamp":null,"family":"pet","temperature":null,"note":"the wrong switch","nominal_pF":47000,"low_pF":44650,"high_pF":49350,"limits_from":"house","capacitance_pF":771014.926868,"uncertainty_pF":8136.52127314,"loss":null,"loss_below":null,"deviation_percent":1540.45729121,"probability_inside":0,"probability_flat":0,"reading_probability":0,"finding":"undecided","compartment":"no place","remark":"switch mid?; limits by house rule, marked tolerance ±10 %; far from every reading of this marking; nearest is A1 film, inside, but for its finding"},
            {"shelf":"9","switch":"mid","marking":"-20+80%","dial":4.2,"dark_from":null,"dark_to":null,"lamp":null,"family":null,"temperature":null,"note":"=1+1","nominal_pF":null,"low_pF":null,"high_pF":null,"limits_from":null,"capacitance_pF":30573.8976139,"uncertainty_pF":388.896419754,"loss":null,"loss_below":null,"deviation_percent":null,"probability_inside":null,"probability_flat":null,"reading_probability":null,"finding":"undecided","compartment":"no place","remark":"nothing in the marking is a value: measured only; nearest is A2 inside, but for its finding"}
            ]
            exit 0
        "#]],
    );
}

#[test]
fn judge_can_read_what_it_wrote() {
    let once = run(&["judge", "--meter", "meter.toml", "-"], ROWS.as_bytes());
    let (table, rest) = once.rsplit_once("exit").expect("an exit line");
    assert_eq!(rest, " 0\n");
    assert_eq!(
        run(&["judge", "--meter", "meter.toml", "-"], table.as_bytes()),
        once
    );
}

#[test]
fn judge_keeps_the_place_of_rows_it_cannot_read() {
    let rows = "\u{feff}marking,switch,dial,dark_from,dark_to,lamp,family
104K,mid,4.1,,,,
,mid,4.1,,,,
104K,,4.1,,,,
104K,mdi,4.1,,,,
104K,mid,,,,,
104K,mid,12,,,,
104K,mid,4.1/x,,,,
104K,mid,,4.1,,,
104K,mid,4.1,,,drak,
104K,mid,,,,lit,
104K,mid,,1,2,never,
104K,mid,4.1,,,,disk
104K,mid,4.1,,,,,,too many
";
    check(
        &["judge", "--meter", "meter.toml", "-"],
        rows,
        expect![[r#"
            marking,switch,dial,dark_from,dark_to,lamp,family,nominal_pF,low_pF,high_pF,limits_from,capacitance_pF,uncertainty_pF,loss,loss_below,deviation_percent,probability_inside,probability_flat,reading_probability,finding,compartment,remark
            104K,mid,4.1,,,,,100000,90000,110000,marked,29824.4968032,385.538487671,,,-70.1755031968,0,0,0.998567743237,outside,,"below the lower limit, 90 nF; far from every reading of this marking"
            ,mid,4.1,,,,,,,,,,,,,,,,,unread,,no marking
            104K,,4.1,,,,,,,,,,,,,,,,,unread,,no switch
            104K,mdi,4.1,,,,,,,,,,,,,,,,,unread,,"Hut meter has no switch `mdi`; known: low, mid, high"
            104K,mid,,,,,,,,,,,,,,,,,,unread,,"no reading: none of dial, dark_from and dark_to, lamp"
            104K,mid,12,,,,,,,,,,,,,,,,,unread,,dial is `12`: the dial goes from 0 to 10
            104K,mid,4.1/x,,,,,,,,,,,,,,,,,unread,,dial is `x`: found `x` at position 1 while reading the number; accepted here: a number
            104K,mid,,4.1,,,,,,,,,,,,,,,,unread,,"dark_from without dark_to: give the other dark edge, or `stop` where a stop cuts the arc"
            104K,mid,4.1,,,drak,,,,,,,,,,,,,,unread,,"lamp is `drak`; accepted: never, always, dark, lit"
            104K,mid,,,,lit,,,,,,,,,,,,,,unread,,"the lamp was lit, but dial does not say where the dial was parked"
            104K,mid,,1,2,never,,,,,,,,,,,,,,unread,,"the lamp was never dark, yet dark edges are given"
            104K,mid,4.1,,,,disk,,,,,,,,,,,,,unread,,"no family is called `disk`; did you mean `disc3`? Known: ceramic, film, paper, mica, glass, electrolytic, tantalum, polymer, edlc, feedthrough, disc1, disc2, disc3, mlcc1, mlcc2, pet, pen, pps, pp, ps, pc, al, ta, wetta"
            104K,mid,4.1,,,,,,,,,,,,,,,,,unread,,9 cells where the header names 7: a comma in a cell needs quotes around the cell
            ! standard input: 12 rows could not be read, the first at line 3; `remark` says why
            exit 1
        "#]],
    );
}

#[test]
fn judge_refuses_tables_without_the_columns_it_needs() {
    check(
        &["judge", "--meter", "meter.toml", "-"],
        "",
        expect![[r#"
            ! standard input is empty: a header is needed
            exit 1
        "#]],
    );
    check(
        &["judge", "--meter", "meter.toml", "-"],
        "marking;switch;dial\n104K;mid;4.1\n",
        expect![[r#"
            ! standard input: the header lacks `marking`, `switch`, a reading (`dial`, `dark_from` and `dark_to`, or `lamp`); it reads: marking;switch;dial
            !   the cells seem to be separated by `;`: save the file with commas
            exit 1
        "#]],
    );
    check(
        &["judge", "--meter", "meter.toml", "absent.csv"],
        "",
        expect![[r#"
            ! cannot read absent.csv: there is no such file
            exit 3
        "#]],
    );
    check(
        &["judge", "--meter", "meter.toml", "--json", "-"],
        "marking,switch,dial\n",
        expect![[r#"
            []
            exit 0
        "#]],
    );
}

#[test]
fn judge_takes_any_bytes() {
    let rows = b"marking,switch,dial,note\n104K\x00\x1b,mid,4.1,\xff\x1b[2J\n";
    let output = run(&["judge", "--meter", "meter.toml", "-"], rows);
    assert!(!output.contains(['\u{1b}', '\0']), "{output}");
    assert!(output.contains("\u{fffd}\\u{1b}[2J"), "{output}");
}

#[test]
fn judge_ends_where_a_row_has_no_end() {
    let mut rows = b"marking,switch,dial,note\n473K,mid,6.3,fine\n473K,mid,6.3,\"open\n".to_vec();
    rows.extend(b"473K,mid,6.3,swallowed\n".repeat(100_000));
    expect![[r#"
        [
        {"marking":"473K","switch":"mid","dial":6.3,"note":"fine","nominal_pF":47000,"low_pF":42300,"high_pF":51700,"limits_from":"marked","capacitance_pF":47438.0180666,"uncertainty_pF":500.698935936,"loss":null,"loss_below":null,"deviation_percent":0.931953333288,"probability_inside":1,"probability_flat":1,"reading_probability":0.999997204547,"finding":"inside","compartment":null,"remark":null}
        ]
        ! standard input: the row at line 3 has no end within 1024 kB
        !   look for a quotation mark left open in that row
        exit 1
    "#]].assert_eq(&run(
        &["judge", "--json", "--meter", "meter.toml", "-"],
        &rows,
    ));
}

#[test]
fn the_demonstration_lot_shows_every_finding() {
    let output = run(
        &[
            "judge",
            "--meter",
            "../../data/example-meter.toml",
            "--tray",
            "../../data/example-tray.toml",
            "../../data/demo-lot.csv",
        ],
        b"",
    );
    assert!(output.ends_with("exit 0\n"), "{output}");
    assert!(
        output.lines().count() > 60,
        "a header, the rows, the exit code"
    );
    for finding in [
        ",inside,",
        ",outside,",
        ",undecided,",
        ",dead,",
        ",no place,",
        "switch B?",
    ] {
        assert!(output.contains(finding), "{finding} in {output}");
    }
}
