-- A draw is published, and in the log, before its first entrant: the list can be changed only while it is open, a closed
-- one is reopened first. What is published with it, the prizes, can be changed only before.
CREATE OR REPLACE FUNCTION list_must_be_open(of_draw uuid) RETURNS void LANGUAGE plpgsql AS $$
DECLARE
  its_state text;
BEGIN
  SELECT state INTO its_state FROM draw WHERE id = of_draw;
  IF its_state <> 'open' THEN
    PERFORM refuse(format('The entrants of a draw that is %s cannot be changed.', its_state));
  END IF;
END $$;
--> statement-breakpoint
CREATE OR REPLACE FUNCTION prize_rules() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  of_draw uuid := coalesce(NEW.draw_id, OLD.draw_id);
  its_state text;
BEGIN
  SELECT state INTO its_state FROM draw WHERE id = of_draw FOR SHARE;
  IF its_state <> 'draft' THEN
    PERFORM refuse(format('The prizes of a draw that is %s cannot be changed.', its_state));
  END IF;
  IF TG_OP = 'DELETE' THEN RETURN OLD; END IF;
  IF TG_OP = 'UPDATE' AND (NEW.draw_id, NEW.code) IS DISTINCT FROM (OLD.draw_id, OLD.code) THEN
    PERFORM refuse('A prize keeps its draw and its code.');
  END IF;
  RETURN NEW;
END $$;
