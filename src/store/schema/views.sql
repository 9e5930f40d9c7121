-- Made anew at every start, so that a view always fits the tables it reads.
-- Spectra under the sample's name that counts. CAST and CROSS JOIN let the planner look into both halves: a window of
-- five spectra is read off the index, and the few reassigned ones are sorted in.
DROP VIEW IF EXISTS spectrum_now;
CREATE VIEW spectrum_now AS
SELECT id, arrival, position, instrument, sample, measured_at, as_read, x, y, flags,
       CAST(0 AS INTEGER) AS analysed_before, CAST(0 AS INTEGER) AS judged_before
FROM spectrum WHERE id NOT IN (SELECT spectrum FROM reassignment)
UNION ALL
SELECT s.id, s.arrival, s.position, s.instrument, m.sample, s.measured_at, s.as_read, s.x, s.y, s.flags,
       m.analysed_before, m.judged_before
FROM reassignment m CROSS JOIN spectrum s ON s.id = m.spectrum
WHERE m.id = (SELECT max(id) FROM reassignment WHERE spectrum = m.spectrum);

DROP VIEW IF EXISTS history;
CREATE VIEW history AS
SELECT s.id AS spectrum, s.sample, a.study, a.species, s.instrument,
       strftime('%Y-%m-%dT%H:%M:%SZ', s.measured_at / 1000, 'unixepoch') AS measured_at,
       strftime('%Y-%m-%dT%H:%M:%SZ', r.received_at / 1000, 'unixepoch') AS received_at,
       r.file, r.sha256,
       a.delta_cm1, a.u_delta_cm1, a.b_cm1, a.u_b_cm1, a.c_cm1, a.u_c_cm1, a.beta,
       a.nu1_cm1, a.u_nu1_cm1, a.nu2_cm1, a.u_nu2_cm1, a.nu3_cm1, a.u_nu3_cm1,
       a.max1_nm, a.max2_nm, a.max3_nm, a.width1_cm1, a.width2_cm1, a.height1, a.height2,
       a.scatter, a.extent, a.u_extent, a.temperature, a.path, a.rms, a.noise, a.reduced_chi2,
       p.name AS recipe, a.engine, a.config_sha256, a.verdict,
       (d.what IS NOT NULL AND d.what = 'exclude') AS excluded,
       coalesce(a.flags, s.flags) AS flags,
       (SELECT CASE
                 WHEN max(j.outcome = 'rings') THEN 'rings'
                 WHEN max(j.outcome = 'undecided') THEN 'undecided'
                 WHEN max(j.outcome = 'gathering') THEN 'gathering'
                 ELSE 'steady'
               END
          FROM judgement j
         WHERE j.spectrum = s.id AND j.id > s.judged_before
           AND j.id = (SELECT max(id) FROM judgement WHERE spectrum = j.spectrum AND rule = j.rule)
        HAVING count(*) > 0) AS judgement,
       s.position,
       -- the name it came with, where a person has mended it
       (SELECT f.sample FROM spectrum f WHERE f.id = s.id AND s.id IN (SELECT spectrum FROM reassignment)) AS came_as
FROM spectrum_now s
JOIN arrival r ON r.id = s.arrival
LEFT JOIN analysis a ON a.id = (SELECT max(id) FROM analysis WHERE spectrum = s.id AND id > s.analysed_before)
LEFT JOIN recipe p ON p.sha256 = a.recipe
LEFT JOIN decision d ON d.id = (SELECT max(id) FROM decision
                                 WHERE subject = 'spectrum ' || s.id AND what IN ('exclude', 'restore'))
WHERE (SELECT outcome FROM arrival_outcome WHERE arrival = r.id ORDER BY id DESC LIMIT 1) IS NOT 'superseded';

DROP VIEW IF EXISTS intake;
CREATE VIEW intake AS
SELECT r.instrument, r.file, r.sha256, r.size AS bytes,
       strftime('%Y-%m-%dT%H:%M:%SZ', r.received_at / 1000, 'unixepoch') AS received_at,
       o.outcome, o.reason, r.id AS arrival
FROM arrival r
LEFT JOIN arrival_outcome o ON o.id = (SELECT max(id) FROM arrival_outcome WHERE arrival = r.id);

DROP VIEW IF EXISTS alarm_list;
CREATE VIEW alarm_list AS
SELECT id, rule, of, subject, priority, state,
       strftime('%Y-%m-%dT%H:%M:%SZ', raised_at / 1000, 'unixepoch') AS raised_at,
       strftime('%Y-%m-%dT%H:%M:%SZ', acknowledged_at / 1000, 'unixepoch') AS acknowledged_at,
       acknowledged_by,
       strftime('%Y-%m-%dT%H:%M:%SZ', returned_at / 1000, 'unixepoch') AS returned_at,
       spectra, diagnosis, confidence, message
FROM alarm;

DROP VIEW IF EXISTS alarm_events;
CREATE VIEW alarm_events AS
SELECT alarm, strftime('%Y-%m-%dT%H:%M:%SZ', at / 1000, 'unixepoch') AS at, event, by, note FROM alarm_event ORDER BY id;

DROP VIEW IF EXISTS decisions;
CREATE VIEW decisions AS
SELECT strftime('%Y-%m-%dT%H:%M:%SZ', d.at / 1000, 'unixepoch') AS at, d.by, d.what, d.subject, d.why,
       strftime('%Y-%m-%dT%H:%M:%SZ', p.since / 1000, 'unixepoch') AS from_at,
       strftime('%Y-%m-%dT%H:%M:%SZ', p.until / 1000, 'unixepoch') AS until_at,
       m.was AS from_sample, m.sample AS to_sample, d.id
FROM decision d
LEFT JOIN out_of_service p ON p.decision = d.id
LEFT JOIN reassignment m ON m.decision = d.id
ORDER BY d.id;

DROP VIEW IF EXISTS configurations;
CREATE VIEW configurations AS
SELECT p.sha256, strftime('%Y-%m-%dT%H:%M:%SZ', p.since / 1000, 'unixepoch') AS from_at,
       strftime('%Y-%m-%dT%H:%M:%SZ', p.until / 1000, 'unixepoch') AS until_at, c.text
FROM configuration_period p JOIN configuration c ON c.sha256 = p.sha256 ORDER BY p.id;

DROP VIEW IF EXISTS letters;
CREATE VIEW letters AS
SELECT t.id, l.alarm, t.recipient, l.subject, t.message_id, t.state, t.attempts,
       strftime('%Y-%m-%dT%H:%M:%SZ', t.next_attempt_at / 1000, 'unixepoch') AS next_attempt_at,
       strftime('%Y-%m-%dT%H:%M:%SZ', t.sent_at / 1000, 'unixepoch') AS sent_at, t.last_error, t.held, t.told_in
FROM letter_recipient t JOIN letter l ON l.id = t.letter;
