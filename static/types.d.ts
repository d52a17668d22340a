/** Libraries that come as plain scripts. */
declare const L: any;
declare const maplibregl: any;
